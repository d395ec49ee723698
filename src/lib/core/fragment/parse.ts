import * as OCL from 'openchemlib';
import { formatFormula } from '../chem';
import { CoreError } from '../errors';
import type { MoleculeGraph } from './graph';

const MAX_HEAVY_ATOMS = 120;

/**
 * Reads one structure from SMILES or a molfile (V2000 or V3000).
 * @throws CoreError bad-formula when it cannot be read, has several parts, or more than 120 heavy atoms
 */
export function parseStructure(text: string, name: string | null = null): MoleculeGraph {
  let molecule: OCL.Molecule;
  try {
    molecule = /M {2}END/.test(text) ? OCL.Molecule.fromMolfile(text) : OCL.Molecule.fromSmiles(text.trim());
  } catch (cause) {
    const why = cause instanceof Error ? cause.message : String(cause);
    throw new CoreError(
      'bad-formula',
      `The structure cannot be read: ${why}`,
      undefined,
      'Check the SMILES or the molfile.'
    );
  }
  return toGraph(molecule, name);
}

/**
 * Reads every structure of an SD file; the title line of each record is its name.
 * @returns structures, and for each unreadable record its number (from 1) and the reason
 */
export function parseSdf(text: string): { structures: MoleculeGraph[]; refused: { record: number; reason: string }[] } {
  const structures: MoleculeGraph[] = [];
  const refused: { record: number; reason: string }[] = [];
  const records = text.split(/^\$\$\$\$.*$/m).filter((record) => record.trim());
  records.forEach((record, i) => {
    const block = record.replace(/^\r?\n(?=.*\r?\n.*\r?\n.*V[23]000)/, '');
    try {
      structures.push(parseStructure(block, block.split(/\r?\n/)[0].trim() || `structure ${i + 1}`));
    } catch (e) {
      refused.push({ record: i + 1, reason: e instanceof Error ? e.message : String(e) });
    }
  });
  return { structures, refused };
}

function toGraph(molecule: OCL.Molecule, name: string | null): MoleculeGraph {
  molecule.removeExplicitHydrogens();
  molecule.ensureHelperArrays(OCL.Molecule.cHelperRings);
  const heavy = molecule.getAtoms();
  if (heavy === 0) throw new CoreError('bad-formula', 'The structure has no atoms.');
  if (heavy > MAX_HEAVY_ATOMS)
    throw new CoreError(
      'bad-formula',
      `The structure has ${heavy} heavy atoms; at most ${MAX_HEAVY_ATOMS} are compared.`
    );
  if (molecule.getFragments().length > 1)
    throw new CoreError(
      'bad-formula',
      'The structure has several parts.',
      undefined,
      'Leave out counter-ions and solvents.'
    );

  const atoms = Array.from({ length: heavy }, (_, i) => ({
    element: molecule.getAtomLabel(i),
    hydrogens: molecule.getAllHydrogens(i)
  }));
  const bonds = Array.from({ length: molecule.getBonds() }, (_, i) => ({
    a: molecule.getBondAtom(0, i),
    b: molecule.getBondAtom(1, i),
    order: Math.min(3, Math.max(1, molecule.getBondOrder(i))) as 1 | 2 | 3,
    aromatic: molecule.isAromaticBond(i),
    ring: molecule.isRingBond(i)
  }));
  let charge = 0;
  const counts: Record<string, number> = {};
  atoms.forEach(({ element, hydrogens }, i) => {
    charge += molecule.getAtomCharge(i);
    counts[element] = (counts[element] ?? 0) + 1;
    if (hydrogens) counts.H = (counts.H ?? 0) + hydrogens;
  });
  return { smiles: molecule.toIsomericSmiles(), name, formula: formatFormula(counts), charge, atoms, bonds };
}
