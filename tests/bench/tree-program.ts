import { solve, type Model } from 'yalps';
import type { TreeGraph } from './tree-graphs';

/**
 * The best tree as an integer program: one variable for each edge; at most one edge into each ion, and an edge from a
 * vertex only where one leads into that vertex (maximum colourful subtree as in Bioinformatics 24, i49, 2008).
 * @returns the optimum, or null when the solver gave up within `timeout` ms
 */
export function optimumByProgram({ vertices }: TreeGraph, timeout: number): number | null {
  const constraints = new Map<string, { max: number }>();
  const variables = new Map<string, Map<string, number>>();
  /** the constraints that an edge into a vertex relaxes */
  const opened = vertices.map((): string[] => []);
  vertices.forEach(({ colour, score, edges }, to) => {
    constraints.set(`ion ${colour}`, { max: 1 });
    for (const { from, weight } of edges) {
      const coefficients = new Map([
        ['score', score + weight],
        [`ion ${colour}`, 1]
      ]);
      variables.set(`${to} below ${from}`, coefficients);
      if (from < 0) continue;
      // The edges from one vertex to all candidates of one ion share a constraint: at most one of them is taken anyway.
      const bound = `ion ${colour} below ${from}`;
      coefficients.set(bound, 1);
      if (constraints.has(bound)) continue;
      constraints.set(bound, { max: 0 });
      opened[from].push(bound);
    }
  });
  for (const [name, coefficients] of variables)
    for (const bound of opened[Number(name.split(' ')[0])]) coefficients.set(bound, -1);
  const model: Model<string, string> = {
    direction: 'maximize',
    objective: 'score',
    constraints,
    variables,
    binaries: true
  };
  const { status, result } = solve(model, { timeout, maxIterations: Infinity, tolerance: 0 });
  return status === 'optimal' ? result : null;
}
