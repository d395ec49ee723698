/**
 * Chemical rules on the elemental composition of molecules (not of fragment ions).
 * Sources: Senior's theorem; element maxima, ratio limits and joint limits of Kind & Fiehn, BMC Bioinformatics 8:105
 * (2007), tables 1 to 3. That paper's own examples break some of its strict limits, so ratios count as a soft score.
 */
import { dbe, monoisotopicMass } from '../chem/composition';
import { valenceOf } from '../chem/elements';
import { type Composition } from '../model';

/** Upper mass limit (u) and the larger of the two published maxima of each element. */
const ELEMENT_MAXIMA: readonly (readonly [number, Composition])[] = [
  [500, { C: 39, H: 72, N: 20, O: 20, P: 9, S: 10, F: 16, Cl: 10, Br: 5, Si: 8 }],
  [1000, { C: 78, H: 126, N: 25, O: 27, P: 9, S: 14, F: 34, Cl: 12, Br: 8, Si: 14 }],
  [2000, { C: 156, H: 236, N: 32, O: 63, P: 9, S: 14, F: 48, Cl: 12, Br: 10, Si: 15 }],
  [3000, { C: 162, H: 208, N: 48, O: 78, P: 6, S: 9, F: 16, Cl: 11, Br: 8 }]
];

/** element : [common low, common high, extended low, extended high] of the ratio to carbon. */
const RATIO_LIMITS: Readonly<Record<string, readonly [number, number, number, number]>> = {
  H: [0.2, 3.1, 0.1, 6],
  F: [0, 1.5, 0, 6],
  Cl: [0, 0.8, 0, 2],
  Br: [0, 0.8, 0, 2],
  N: [0, 1.3, 0, 4],
  O: [0, 1.2, 0, 3],
  P: [0, 0.3, 0, 2],
  S: [0, 0.8, 0, 3],
  Si: [0, 0.5, 0, 1]
};

/** [elements, count that all must exceed, limits that must not be reached]. */
const JOINT_LIMITS: readonly (readonly [readonly string[], number, Composition])[] = [
  [['N', 'O', 'P', 'S'], 1, { N: 10, O: 20, P: 4, S: 3 }],
  [['N', 'O', 'P'], 3, { N: 11, O: 22, P: 6 }],
  [['O', 'P', 'S'], 1, { O: 14, P: 3, S: 3 }],
  [['P', 'S', 'N'], 1, { P: 3, S: 3, N: 4 }],
  [['N', 'O', 'S'], 6, { N: 19, O: 14, S: 8 }]
];

/** Senior's three conditions on a neutral molecule: even valence sum, enough for the largest atom, and connected. */
export function obeysSenior(molecule: Composition): boolean {
  let sum = 0;
  let largest = 0;
  let atoms = 0;
  for (const symbol of Object.keys(molecule)) {
    const count = molecule[symbol];
    if (count <= 0) continue;
    const valence = valenceOf(symbol);
    sum += count * valence;
    atoms += count;
    largest = Math.max(largest, valence);
  }
  return sum % 2 === 0 && sum >= 2 * largest && sum >= 2 * (atoms - 1);
}

/** True when no element exceeds the published maximum for the molecule's mass. */
export function withinElementMaxima(molecule: Composition): boolean {
  const mass = monoisotopicMass(molecule);
  const row = ELEMENT_MAXIMA.find(([limit]) => mass < limit);
  if (!row) return true;
  return Object.keys(molecule).every((symbol) => molecule[symbol] <= (row[1][symbol] ?? Infinity));
}

export type RatioClass = 'common' | 'extended' | 'extreme';

/** The worst class of all element-to-carbon ratios; a molecule without carbon is 'extreme'. */
export function ratioClass(molecule: Composition): RatioClass {
  const carbon = molecule.C ?? 0;
  if (carbon === 0) return 'extreme';
  let worst: RatioClass = 'common';
  for (const [symbol, [low, high, wideLow, wideHigh]] of Object.entries(RATIO_LIMITS)) {
    const ratio = (molecule[symbol] ?? 0) / carbon;
    if (ratio < wideLow || ratio > wideHigh) return 'extreme';
    if (ratio < low || ratio > high) worst = 'extended';
  }
  return worst;
}

/** The joint limits on hetero atoms, read strictly as printed ("all above" and "less than"). */
export function withinJointLimits(molecule: Composition): boolean {
  return JOINT_LIMITS.every(
    ([elements, over, limits]) =>
      !elements.every((e) => (molecule[e] ?? 0) > over) ||
      Object.keys(limits).every((e) => (molecule[e] ?? 0) < limits[e])
  );
}

/** Rings plus double bonds of a closed-shell molecule: a whole number of at least 0. */
export function isClosedShellMolecule(molecule: Composition): boolean {
  const bonds = dbe(molecule);
  return bonds >= 0 && Number.isInteger(bonds);
}
