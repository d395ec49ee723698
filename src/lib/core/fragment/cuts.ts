import type { AtomSet, MoleculeGraph } from './graph';

/** One way to split a connected part in two: the one or two bonds that are broken. */
export interface Cut {
  bonds: number[];
  side: AtomSet;
}

const bit = (i: number): AtomSet => 1n << BigInt(i);

interface Part {
  atoms: number[];
  /** neighbours of each atom inside the part: [atom, bond]. */
  near: Map<number, [number, number][]>;
}

function induced(graph: MoleculeGraph, set: AtomSet): Part {
  const near = new Map<number, [number, number][]>();
  graph.atoms.forEach((_, i) => {
    if (set & bit(i)) near.set(i, []);
  });
  graph.bonds.forEach(({ a, b }, i) => {
    if (near.has(a) && near.has(b)) {
      near.get(a)!.push([b, i]);
      near.get(b)!.push([a, i]);
    }
  });
  return { atoms: [...near.keys()], near };
}

/** Bridges of the part without bond `without`, each with the atoms on its far side (Tarjan, SIAM J. Comput. 1, 146, 1972). */
function bridges(part: Part, without: number): { bond: number; side: AtomSet }[] {
  const order = new Map<number, number>();
  const found: { bond: number; side: AtomSet }[] = [];
  let clock = 0;
  const visit = (atom: number, by: number): { low: number; side: AtomSet } => {
    const own = clock++;
    order.set(atom, own);
    let low = own;
    let side = bit(atom);
    for (const [next, bond] of part.near.get(atom)!) {
      if (bond === by || bond === without) continue;
      const seen = order.get(next);
      if (seen !== undefined) {
        low = Math.min(low, seen);
        continue;
      }
      const below = visit(next, bond);
      side |= below.side;
      low = Math.min(low, below.low);
      if (below.low > own) found.push({ bond, side: below.side });
    }
    return { low, side };
  };
  visit(part.atoms[0], -1);
  return found;
}

/**
 * All splits of a connected part by one bond, or by two bonds of the same ring system; each split once.
 * @param set connected set of atoms
 */
export function cutsOf(graph: MoleculeGraph, set: AtomSet): Cut[] {
  const part = induced(graph, set);
  if (part.atoms.length < 2) return [];
  const single = bridges(part, -1);
  const isBridge = new Set(single.map(({ bond }) => bond));
  const cuts: Cut[] = single.map(({ bond, side }) => ({ bonds: [bond], side }));
  const bonds = new Set([...part.near.values()].flat().map(([, bond]) => bond));
  for (const first of [...bonds].sort((a, b) => a - b)) {
    if (isBridge.has(first)) continue;
    for (const { bond, side } of bridges(part, first))
      if (bond > first && !isBridge.has(bond)) cuts.push({ bonds: [first, bond], side });
  }
  return cuts;
}
