/**
 * How good the best tree is: `npm run bench -- tree [--graphs 200]`. Invented graphs of 8 to 45 ions against an integer
 * program that a general package solves.
 */
import { solveTree } from '../../src/lib/core/suggest';
import { median, option, type Bench, type Goal } from './goal';
import { treeGraph } from './tree-graphs';
import { optimumByProgram } from './tree-program';

const SIZES = [8, 10, 12, 15, 17, 20, 25, 30, 37, 45];
const EXACT_UP_TO = 15;
/** The size at which the times are compared. */
const TIMED = 30;
const SOLVER_LIMIT = 60_000;
/** As the product asks for it in the last pass. */
const LIMITS = { maxWork: 1_000_000 };

interface Row {
  ions: number;
  ratio: number;
  proven: boolean;
  ownMs: number;
  programMs: number;
}

function measure(seed: number, ions: number): Row | null {
  const graph = treeGraph(seed, ions, seed % 2 === 0);
  const copy = { ...graph, vertices: graph.vertices.map((v) => ({ ...v, edges: [...v.edges] })) };
  const t0 = process.cpuUsage().user;
  const own = solveTree(graph.colours, graph.vertices, LIMITS);
  const t1 = process.cpuUsage().user;
  const optimum = optimumByProgram(copy, SOLVER_LIMIT);
  const t2 = process.cpuUsage().user;
  if (optimum === null) return null;
  if (own.proven && own.score < optimum - 1e-6) throw new Error(`a tree of ${ions} ions was wrongly said to be proven`);
  const ratio = optimum > 1e-9 ? own.score / optimum : 1;
  return { ions, ratio, proven: own.proven, ownMs: (t1 - t0) / 1e3, programMs: (t2 - t1) / 1e3 };
}

function run(args: readonly string[]): Goal[] {
  const graphs = Number(option(args, 'graphs', '200'));
  const rows: Row[] = [];
  let unsolved = 0;
  for (let i = 0; i < graphs; i++) {
    const row = measure(i + 1, SIZES[i % SIZES.length]);
    if (row) rows.push(row);
    else unsolved++;
  }
  console.log('ions  graphs  mean of optimum  worst  optimal  proven  own ms  program ms');
  for (const ions of SIZES) {
    const own = rows.filter((row) => row.ions === ions);
    if (own.length === 0) continue;
    const ratios = own.map((row) => row.ratio);
    console.log(
      [
        String(ions).padStart(4),
        String(own.length).padStart(7),
        (ratios.reduce((a, b) => a + b) / own.length).toFixed(4).padStart(16),
        Math.min(...ratios)
          .toFixed(4)
          .padStart(6),
        String(ratios.filter((r) => r > 1 - 1e-9).length).padStart(8),
        String(own.filter((row) => row.proven).length).padStart(7),
        median(own.map((row) => row.ownMs))
          .toFixed(1)
          .padStart(7),
        median(own.map((row) => row.programMs))
          .toFixed(1)
          .padStart(11)
      ].join(' ')
    );
  }
  if (unsolved)
    console.log(`${unsolved} graphs were left out: the program had no optimum after ${SOLVER_LIMIT / 1000} s`);
  const small = rows.filter((row) => row.ions <= EXACT_UP_TO);
  const large = rows.filter((row) => row.ions > EXACT_UP_TO);
  const timed = rows.filter((row) => row.ions === TIMED);
  const least = (list: Row[]) => Math.min(...list.map((row) => row.ratio));
  return [
    {
      what: `worst share of the optimum up to ${EXACT_UP_TO} ions`,
      measured: least(small),
      limit: 1 - 1e-9,
      bound: 'at least'
    },
    {
      what: 'mean share of the optimum beyond',
      measured: large.reduce((sum, row) => sum + row.ratio, 0) / large.length,
      limit: 0.995,
      bound: 'at least'
    },
    { what: 'worst share of the optimum beyond', measured: least(large), limit: 0.97, bound: 'at least' },
    {
      what: `time against the program at ${TIMED} ions`,
      measured: median(timed.map((row) => row.ownMs / row.programMs)),
      limit: 0.25,
      bound: 'at most'
    }
  ];
}

export const bench: Bench = { title: 'best trees against an integer program', run };
