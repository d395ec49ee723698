import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { solveTree, type TreeVertex } from './index';

/** Random trees: colours in order, each vertex below the root and below some vertices of earlier colours. */
const problem = fc
  .array(
    fc.array(
      fc.record({ score: fc.integer({ min: -6, max: 8 }), root: fc.integer({ min: -9, max: 3 }), seed: fc.nat(1e6) }),
      { minLength: 1, maxLength: 3 }
    ),
    { minLength: 1, maxLength: 6 }
  )
  .map((colours) => {
    const vertices: TreeVertex[] = [];
    colours.forEach((list, colour) => {
      const earlier = vertices.length;
      for (const { score, root, seed } of list) {
        const edges = [{ from: -1, weight: root }];
        for (let from = 0; from < earlier; from++) {
          const bits = Math.imul(seed + 1, from * 2654435 + 97) >>> 8;
          if (bits % 3 > 0) edges.push({ from, weight: (bits % 13) - 5 });
        }
        vertices.push({ colour, score, edges });
      }
    });
    return { colours: colours.length, vertices };
  });

/** All combinations of one vertex or none per colour. */
function exhaustive(colours: number, vertices: readonly TreeVertex[]): number {
  let best = 0;
  const choose = (colour: number, chosen: number[]): void => {
    if (colour === colours) {
      const value = chosen.reduce((sum, v) => {
        const reachable = vertices[v].edges.filter((e) => e.from < 0 || chosen.includes(e.from));
        return sum + vertices[v].score + Math.max(...reachable.map((e) => e.weight));
      }, 0);
      best = Math.max(best, value);
      return;
    }
    choose(colour + 1, chosen);
    vertices.forEach((v, i) => {
      if (v.colour === colour) choose(colour + 1, [...chosen, i]);
    });
  };
  choose(0, []);
  return best;
}

describe('best tree', () => {
  it('is the optimum of all trees and says that it is proven', () => {
    fc.assert(
      fc.property(problem, ({ colours, vertices }) => {
        const solution = solveTree(colours, vertices, { maxWork: 1e6 });
        expect(solution.score).toBeCloseTo(exhaustive(colours, vertices), 9);
        expect(solution.proven).toBe(true);
      }),
      { numRuns: 200 }
    );
  });

  it('never claims proof nor exceeds its bound when the work is cut short', () => {
    fc.assert(
      fc.property(problem, ({ colours, vertices }) => {
        const solution = solveTree(colours, vertices, { maxWork: 0 });
        const optimum = exhaustive(colours, vertices);
        expect(solution.score).toBeLessThanOrEqual(optimum + 1e-9);
        expect(solution.bound).toBeGreaterThanOrEqual(optimum - 1e-9);
        if (solution.proven) expect(solution.score).toBeCloseTo(optimum, 9);
      })
    );
  });

  it('leaves out an ion that would cost more than it earns, but keeps it as a step to others', () => {
    const leaf: TreeVertex[] = [{ colour: 0, score: -1, edges: [{ from: -1, weight: 0 }] }];
    expect(solveTree(1, leaf, { maxWork: 1000 }).chosen[0]).toBe(-1);
    const step: TreeVertex[] = [
      ...leaf,
      {
        colour: 1,
        score: 1,
        edges: [
          { from: 0, weight: 3 },
          { from: -1, weight: -3 }
        ]
      }
    ];
    const solution = solveTree(2, step, { maxWork: 1000 });
    expect([...solution.chosen]).toEqual([0, 1]);
    expect(solution.score).toBe(3);
  });
});
