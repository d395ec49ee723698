import { describe, expect, it } from 'vitest';
import { CoreError } from '../errors';
import {
  atomsOf,
  cutsOf,
  atomSet,
  disconnect,
  explainIon,
  indexParts,
  parseSdf,
  parseStructure,
  rankStructures,
  scoreStructure
} from './index';

/** All connected atom sets by brute force: the oracle for small molecules. */
function connectedSets(graph: ReturnType<typeof parseStructure>): Set<bigint> {
  const near = graph.atoms.map((_, i) => graph.bonds.flatMap(({ a, b }) => (a === i ? [b] : b === i ? [a] : [])));
  const sets = new Set<bigint>();
  for (let bits = 1n; bits < 1n << BigInt(graph.atoms.length); bits++) {
    const atoms = atomsOf(bits);
    const seen = new Set([atoms[0]]);
    for (const atom of seen) near[atom].forEach((next) => (bits >> BigInt(next)) & 1n && seen.add(next));
    if (seen.size === atoms.length) sets.add(bits);
  }
  return sets;
}

describe('structures', () => {
  it('are read from SMILES with formula and charge', () => {
    expect(parseStructure('COc1ccccc1C(=O)[O-]')).toMatchObject({ formula: 'C8H7O3', charge: -1 });
    // caffeine, C8H10N4O2 (IUPAC Compendium of common compounds; constitution)
    expect(parseStructure('CN1C=NC2=C1C(=O)N(C(=O)N2C)C').formula).toBe('C8H10N4O2');
  });

  it('are refused with a reason when unreadable or in several parts', () => {
    expect(() => parseStructure('C1CC(')).toThrow(CoreError);
    expect(() => parseStructure('CCO.Cl')).toThrow(/several parts/);
  });

  it('come from an SD file record by record, bad ones named', () => {
    const block = (title: string, bond: string) =>
      `${title}\n\n\n  2  1  0  0  0  0  0  0  0  0999 V2000\n    0.0000    0.0000    0.0000 C   0  0\n    1.0000    0.0000    0.0000 O   0  0\n${bond}\nM  END\n$$$$\n`;
    const { structures, refused } = parseSdf(block('methanol', '  1  2  1  0') + block('broken', '  1  9  1  0'));
    expect(structures.map(({ name, formula }) => [name, formula])).toEqual([['methanol', 'CH4O']]);
    expect(refused.map(({ record }) => record)).toEqual([2]);
  });
});

describe('cuts', () => {
  it('of a chain are its bonds, of a ring every pair of bonds', () => {
    const chain = parseStructure('CCCC');
    expect(cutsOf(chain, atomSet([0, 1, 2, 3]))).toHaveLength(3);
    const ring = parseStructure('C1CCCCC1');
    expect(cutsOf(ring, atomSet([0, 1, 2, 3, 4, 5]))).toHaveLength(15);
  });
});

describe('disconnection', () => {
  it.each(['CC(C)CO', 'C1CCC1CO', 'c1ccccc1C', 'OC1CC(N)CC1=O'])('finds every connected part of %s', (smiles) => {
    const graph = parseStructure(smiles);
    const { parts, complete } = disconnect(graph, { depth: graph.atoms.length, minAtoms: 1 });
    expect(complete).toBe(true);
    expect(new Set(parts.keys())).toEqual(connectedSets(graph));
  });

  it('breaks at most two bonds of a ring system at once, so a bridgehead alone is never cut out', () => {
    const norbornane = parseStructure('C1CC2CCC1C2');
    const { parts } = disconnect(norbornane, { depth: 7, minAtoms: 1 });
    const missing = [...connectedSets(norbornane)]
      .filter((set) => !parts.has(set))
      .map((set) => 7 - atomsOf(set).length);
    expect(new Set(missing)).toEqual(new Set([1]));
  });

  it('stops at its limit and says so', () => {
    const graph = parseStructure('CCCCCCCCCCCCCCCC');
    expect(disconnect(graph, { depth: 4, maxParts: 10 }).complete).toBe(false);
  });

  it('can be cancelled', () => {
    expect(() => disconnect(parseStructure('CCCC'), { isCancelled: () => true })).toThrow(CoreError);
  });
});

// Cocaine: loss of benzoic acid 304 -> 182 and the benzoyl cation 105 are textbook (handbook knowledge, from memory).
const COCAINE = 'COC(=O)C1C(OC(=O)c2ccccc2)CC2CCC1N2C';

describe('explanations of ions', () => {
  const graph = parseStructure(COCAINE);
  const index = indexParts(disconnect(graph));

  it('give the benzoyl cation as the benzoyl atoms alone', () => {
    const [best, ...others] = explainIon(index, 'C7H5O', null);
    const labels = atomsOf(best.atoms).map((atom) => graph.atoms[atom].element);
    expect(labels.sort().join('')).toBe('CCCCCCCO');
    expect(best.brokenBonds).toBe(1);
    expect(others).toHaveLength(0);
  });

  it('keep ties: both methyl groups of dimethyl ether', () => {
    const ether = parseStructure('COC');
    const found = explainIon(indexParts(disconnect(ether, { minAtoms: 1 })), 'CH3', null);
    expect(found.map(({ atoms }) => atomsOf(atoms))).toEqual([[0], [2]]);
  });

  it('refuse formulas that the structure cannot give', () => {
    expect(explainIon(index, 'C7H7S', null)).toEqual([]);
    expect(explainIon(index, 'C7H20O', null)).toEqual([]);
  });
});

describe('scores over stages', () => {
  const spectra = [
    {
      level: 2,
      parent: null,
      precursorFormula: 'C17H22NO4',
      ions: [
        { mz: 182.1176, intensity: 100, formula: 'C10H16NO2' },
        { mz: 105.0335, intensity: 30, formula: 'C7H5O' }
      ]
    },
    {
      level: 3,
      parent: 0,
      precursorFormula: 'C10H16NO2',
      ions: [
        { mz: 150.0913, intensity: 100, formula: 'C9H12NO' },
        { mz: 105.0335, intensity: 10, formula: 'C7H5O' }
      ]
    }
  ];

  it('count an ion only when its atoms lie within the measured precursor ion', () => {
    const graph = parseStructure(COCAINE);
    const result = scoreStructure(graph, spectra);
    const of = (spectrum: number, ion: number) =>
      result.ions.find((x) => x.spectrum === spectrum && x.ion === ion)!.explanations;
    const precursor = of(0, 0).map(({ atoms }) => atoms);
    for (const { atoms } of [...of(1, 0), ...of(1, 1)])
      expect(precursor.some((outer) => (atoms & ~outer) === 0n)).toBe(true);
    // benzoyl was lost before this stage: what is left of it costs far more than the benzoyl cation of MS2
    expect(of(0, 1)[0].cost).toBeLessThan(1);
    expect(of(1, 1).every(({ cost }) => cost > 3)).toBe(true);
    expect(result.explainedByStage['2']).toBeCloseTo(1, 6);
  });

  it('rank the structure that explains more first', () => {
    // same formula C17H21NO4, the ester turned round to a phenylacetate-like isomer without a benzoyl group
    const isomer = parseStructure('COC(=O)C1C(OCc2ccc(O)cc2)CC2C=CC1N2C');
    expect(isomer.formula).toBe('C17H21NO4');
    const ranked = rankStructures([isomer, parseStructure(COCAINE)], spectra);
    expect(ranked[0].structure.smiles).toBe(parseStructure(COCAINE).smiles);
  });
});
