import type { IonItem, MarkState } from '$lib/state/ion-rows';

/** An ion formula of the tree: all ions that carry it, in whatever spectrum. */
export interface GraphNode {
  /** formula and charge */
  key: string;
  formula: string;
  mz: number;
  mark: MarkState | 'unseen';
  /** the strongest ion with this formula; null when the ion is only named as an origin */
  ionId: number | null;
  ionIds: number[];
  errorPpm: number | null;
}

export interface GraphEdge {
  key: string;
  from: string;
  to: string;
  loss: string;
  radical: boolean;
  measured: boolean;
  /** the one by which the node is placed */
  primary: boolean;
}

export interface IonGraphModel {
  nodes: GraphNode[];
  edges: GraphEdge[];
}

const WEIGHT: Readonly<Record<MarkState, number>> = { open: 0, rejected: 0, proposed: 1, confirmed: 2, disputed: 3 };
const keyOf = (formula: string, charge: number) => `${formula} ${charge}`;

function collectNodes(ions: readonly IonItem[]): Map<string, GraphNode> {
  const nodes = new Map<string, GraphNode>();
  const strongest = new Map<string, number>();
  for (const ion of ions) {
    if (!ion.formula) continue;
    const key = keyOf(ion.formula, ion.charge);
    const { mz, mark, id, errorPpm, formula } = ion;
    const node = nodes.get(key) ?? { key, formula, mz, mark, ionId: id, ionIds: [], errorPpm };
    node.ionIds.push(id);
    if (WEIGHT[mark] > WEIGHT[node.mark as MarkState]) node.mark = mark;
    if (ion.relative > (strongest.get(key) ?? -1)) {
      strongest.set(key, ion.relative);
      Object.assign(node, { mz, ionId: id, errorPpm });
    }
    nodes.set(key, node);
  }
  return nodes;
}

function collectEdges(ions: readonly IonItem[], nodes: Map<string, GraphNode>): Map<string, GraphEdge> {
  const edges = new Map<string, GraphEdge>();
  for (const ion of ions) {
    if (!ion.formula || !ion.fromFormula || !ion.loss || ion.fromFormula === ion.formula) continue;
    const from = keyOf(ion.fromFormula, ion.charge);
    const to = keyOf(ion.formula, ion.charge);
    if (!nodes.has(from))
      nodes.set(from, {
        ...{ key: from, formula: ion.fromFormula, mz: ion.fromMz ?? ion.mz, mark: 'unseen' },
        ...{ ionId: null, ionIds: [], errorPpm: null }
      });
    const key = `${from} > ${to}`;
    const edge = edges.get(key);
    if (edge) edge.measured ||= ion.link === 'measured';
    else
      edges.set(key, {
        ...{ key, from, to, loss: ion.loss, radical: ion.lossRadical },
        ...{ measured: ion.link === 'measured', primary: false }
      });
  }
  return edges;
}

/**
 * Assigned ions as nodes and their losses as edges. Each node is placed by one edge: a measured one before an inferred
 * one, then the one from the lightest ion (the deepest stage). Further measured edges are kept, further inferred ones not.
 */
export function graphOf(items: readonly IonItem[]): IonGraphModel {
  const ions = items.filter((ion) => ion.formula && ion.state !== 'rejected' && ion.state !== 'open');
  const nodes = collectNodes(ions);
  const edges = [...collectEdges(ions, nodes).values()];
  const into = new Map<string, GraphEdge>();
  const weight = (edge: GraphEdge) => nodes.get(edge.from)?.mz ?? Infinity;
  for (const edge of edges) {
    const best = into.get(edge.to);
    const better =
      !best || (edge.measured && !best.measured) || (edge.measured === best.measured && weight(edge) < weight(best));
    if (better) into.set(edge.to, edge);
  }
  for (const edge of into.values()) edge.primary = true;
  const sorted = [...nodes.values()].sort((a, b) => b.mz - a.mz || (a.key < b.key ? -1 : 1));
  return { nodes: sorted, edges: edges.filter((edge) => edge.primary || edge.measured) };
}

/**
 * The ions that the argument rests on: those that were isolated, disputed or selected, then the strongest, each with
 * the chain of formulas that it hangs on. A graph of all is for zooming; one of these is read at a glance.
 * @param most formulas to choose before their chains are added
 */
export function mainIons(items: readonly IonItem[], most: number, selected: number | null): IonItem[] {
  const held = items.filter((ion) => ion.formula && ion.state !== 'rejected' && ion.state !== 'open');
  const rank = (ion: IonItem) =>
    (ion.id === selected ? 4000 : 0) +
    (ion.isPrecursor ? 2000 : 0) +
    (ion.mark === 'disputed' ? 1000 : 0) +
    ion.relative;
  const chosen = new Set<string>();
  for (const ion of [...held].sort((a, b) => rank(b) - rank(a) || b.mz - a.mz)) {
    if (chosen.size >= most) break;
    chosen.add(keyOf(ion.formula!, ion.charge));
  }
  for (let before = 0; before !== chosen.size;) {
    before = chosen.size;
    for (const ion of held)
      if (ion.fromFormula && chosen.has(keyOf(ion.formula!, ion.charge)))
        chosen.add(keyOf(ion.fromFormula, ion.charge));
  }
  return held.filter((ion) => chosen.has(keyOf(ion.formula!, ion.charge)));
}

/** A node with those placed under it, for the list form of the graph. */
export interface GraphBranch {
  node: GraphNode;
  edge: GraphEdge | null;
  children: GraphBranch[];
}

/** The forest by primary edges; roots first, then by descending m/z. */
export function branchesOf({ nodes, edges }: IonGraphModel): GraphBranch[] {
  const branches = new Map(nodes.map((node) => [node.key, { node, edge: null, children: [] } as GraphBranch]));
  const roots = new Set(branches.values());
  for (const edge of edges) {
    const parent = branches.get(edge.from);
    const child = branches.get(edge.to);
    if (!edge.primary || !parent || !child || holds(child, parent)) continue;
    child.edge = edge;
    parent.children.push(child);
    roots.delete(child);
  }
  for (const branch of branches.values()) branch.children.sort((a, b) => b.node.mz - a.node.mz);
  return [...roots];
}

/** Whether `wanted` hangs below `branch`: an edge back would close a ring. */
const holds = (branch: GraphBranch, wanted: GraphBranch): boolean =>
  branch === wanted || branch.children.some((child) => holds(child, wanted));
