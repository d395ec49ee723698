import type { ReportRow } from './model';

/** An assigned ion, merged over all spectra in which the same formula was seen. */
export interface GraphNode {
  formula: string;
  charge: number;
  oddElectron: boolean;
  mz: number;
  state: ReportRow['state'];
  /** percent of a base peak, the most over all spectra. */
  intensity: number;
  column: number;
  row: number;
}
export interface GraphEdge {
  from: GraphNode;
  to: GraphNode;
  loss: string;
  radical: boolean;
  /** measured where any spectrum isolated the upper ion; the two kinds are never drawn alike. */
  measured: boolean;
}

/** Most ions that one drawing holds legibly. */
export const MAX_NODES = 30;

const ranks = { confirmed: 0, proposed: 1, open: 2, rejected: 3 } as const;

function mergeNodes(rows: readonly ReportRow[]): Map<string, GraphNode> {
  const nodes = new Map<string, GraphNode>();
  for (const row of rows) {
    if (!row.formula) continue;
    const known = nodes.get(row.formula);
    if (!known) {
      const { formula, charge, oddElectron, found: mz, state, intensity } = row;
      nodes.set(formula, { formula, charge, oddElectron, mz, state, intensity, column: 0, row: 0 });
      continue;
    }
    if (row.intensity > known.intensity) Object.assign(known, { mz: row.found, intensity: row.intensity });
    if (ranks[row.state] < ranks[known.state]) known.state = row.state;
  }
  return nodes;
}

function mergeEdges(rows: readonly ReportRow[], nodes: Map<string, GraphNode>): GraphEdge[] {
  const edges = new Map<string, GraphEdge>();
  for (const { formula, fromFormula, loss, lossRadical, link } of rows) {
    const [from, to] = [nodes.get(fromFormula ?? ''), nodes.get(formula ?? '')];
    if (!from || !to || from === to || !loss) continue;
    const key = `${from.formula}>${to.formula}`;
    const known = edges.get(key);
    if (known) known.measured ||= link === 'measured';
    else edges.set(key, { from, to, loss, radical: lossRadical, measured: link === 'measured' });
  }
  return [...edges.values()];
}

/** One edge into each node decides its place: the measured one from the lightest ion, that is the nearest stage. */
function placingEdges(edges: readonly GraphEdge[]): Map<GraphNode, GraphEdge> {
  const best = new Map<GraphNode, GraphEdge>();
  for (const edge of edges) {
    const known = best.get(edge.to);
    const better = !known || Number(edge.measured) - Number(known.measured) || known.from.mz - edge.from.mz;
    // An ion comes from a heavier one of its charge; anything else would make a circle.
    if (edge.from.mz > edge.to.mz && (better === true || better > 0)) best.set(edge.to, edge);
  }
  return best;
}

/** Leaves take the rows one after the other, an ion stands in the middle of what came from it; stages go to the right. */
function place(nodes: readonly GraphNode[], into: Map<GraphNode, GraphEdge>): number {
  const children = new Map<GraphNode, GraphNode[]>();
  for (const node of nodes) {
    const from = into.get(node)?.from;
    if (from) children.set(from, [...(children.get(from) ?? []), node]);
  }
  let next = 0;
  const visit = (node: GraphNode, column: number): void => {
    node.column = column;
    const own = (children.get(node) ?? []).sort((a, b) => b.mz - a.mz);
    own.forEach((child) => visit(child, column + 1));
    node.row = own.length ? (own[0].row + own[own.length - 1].row) / 2 : next++;
  };
  for (const root of nodes.filter((node) => !into.has(node)).sort((a, b) => b.mz - a.mz)) visit(root, 0);
  return next;
}

/** Merges assigned ions by formula, keeps the strongest, and lays them out from left to right by generation. */
export function layoutGraph(rows: readonly ReportRow[]) {
  const all = mergeNodes(rows);
  const precursors = new Set(rows.filter((row) => row.isPrecursor && row.formula).map((row) => row.formula));
  const strongest = [...all.values()].sort(
    (a, b) =>
      Number(precursors.has(b.formula)) - Number(precursors.has(a.formula)) ||
      ranks[a.state] - ranks[b.state] ||
      b.intensity - a.intensity
  );
  const nodes = strongest.slice(0, MAX_NODES);
  const edges = mergeEdges(rows, new Map(nodes.map((node) => [node.formula, node])));
  const leaves = place(nodes, placingEdges(edges));
  return { nodes, edges, leaves, leftOut: all.size - nodes.length };
}
