export { cutsOf, type Cut } from './cuts';
export { bondPenalty, disconnect, heavyKey, type Disconnection, type DisconnectOptions, type Part } from './disconnect';
export { explainIon, indexParts, type Explanation } from './explain';
export { atomSet, atomsOf, within, type AtomSet, type MoleculeGraph } from './graph';
export { parseSdf, parseStructure } from './parse';
export { rankStructures, scoreStructure, type AssignedSpectrum, type ExplainedIon, type StructureScore } from './score';
