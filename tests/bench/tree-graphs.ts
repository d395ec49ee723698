import type { TreeVertex } from '../../src/lib/core/suggest';
import { seeded } from './seeded';

export interface TreeGraph {
  colours: number;
  vertices: TreeVertex[];
}

/** Atoms of the invented precursor ion: C, H, N, O, S. */
const WHOLE = [30, 40, 6, 10, 2];
const CANDIDATES = 5;

const within = (part: readonly number[], whole: readonly number[]) => part.every((n, i) => n <= whole[i]);

/**
 * An invented problem: every ion has five random sub-compositions of the precursor ion, an edge leads from a candidate
 * to each of an earlier ion that contains it. In the dense form nearly every ion is worth explaining, in the sparse one
 * few are.
 */
export function treeGraph(seed: number, colours: number, dense: boolean): TreeGraph {
  const random = seeded(seed * 7919 + colours);
  for (let i = 0; i < 8; i++) random();
  const ions = Array.from({ length: colours }, () => {
    const size = 0.15 + 0.8 * random();
    return {
      size,
      candidates: Array.from({ length: CANDIDATES }, () =>
        WHOLE.map((most) => Math.min(most, Math.round(most * size * (0.6 + 0.8 * random()))))
      )
    };
  }).sort((a, b) => b.size - a.size);
  const vertices: TreeVertex[] = [];
  const counts: number[][] = [];
  ions.forEach(({ candidates }, colour) => {
    const earlier = vertices.length;
    for (const own of candidates) {
      const score = dense ? 4 * random() : 6 * random() - 3;
      const edges = [{ from: -1, weight: -3 * random() - (dense ? 0 : 1) }];
      for (let from = 0; from < earlier; from++)
        if (within(own, counts[from])) edges.push({ from, weight: 3 * random() - 2 });
      vertices.push({ colour, score, edges });
      counts.push(own);
    }
  });
  return { colours, vertices };
}
