/** A molecule as the disconnection sees it: heavy atoms with their hydrogens counted, bonds between heavy atoms. */
export interface MoleculeGraph {
  /** isomeric SMILES as a stable name. */
  smiles: string;
  name: string | null;
  /** Hill order, hydrogens included. */
  formula: string;
  /** net charge of the drawn structure. */
  charge: number;
  atoms: { element: string; hydrogens: number }[];
  bonds: { a: number; b: number; order: 1 | 2 | 3; aromatic: boolean; ring: boolean }[];
}

/** A set of heavy atoms, one bit an atom. */
export type AtomSet = bigint;

export const atomSet = (atoms: Iterable<number>): AtomSet => {
  let set = 0n;
  for (const atom of atoms) set |= 1n << BigInt(atom);
  return set;
};

/** Indices of the atoms in the set, ascending. */
export function atomsOf(set: AtomSet): number[] {
  const atoms: number[] = [];
  for (let i = 0, rest = set; rest; i++, rest >>= 1n) if (rest & 1n) atoms.push(i);
  return atoms;
}

/** whether every atom of `inner` lies in `outer`. */
export const within = (inner: AtomSet, outer: AtomSet): boolean => (inner & ~outer) === 0n;
