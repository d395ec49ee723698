import type { GraphBranch } from './graph-model';

export interface Point {
  x: number;
  y: number;
}

export interface LayoutSteps {
  /** distance of neighbouring leaves, and of layers, in pixels when layers go down */
  down: { leaf: number; layer: number };
  /** the same when layers go to the right */
  right: { leaf: number; layer: number };
}

export const STEPS: LayoutSteps = { down: { leaf: 126, layer: 60 }, right: { leaf: 38, layer: 176 } };

/** Subtree placed for itself: across of each node, and how far it reaches on each layer below its root. */
interface Block {
  across: Map<string, number>;
  root: number;
  left: number[];
  right: number[];
}

/** Sets blocks side by side, as close as the leaf step allows on every layer. */
function sideBySide(blocks: readonly Block[], leaf: number): Block {
  const across = new Map<string, number>();
  const left: number[] = [];
  const right: number[] = [];
  const roots: number[] = [];
  for (const block of blocks) {
    let shift = -Infinity;
    block.left.forEach((x, depth) => (shift = Math.max(shift, (right[depth] ?? -Infinity) + leaf - x)));
    if (shift === -Infinity) shift = 0;
    for (const [key, x] of block.across) across.set(key, x + shift);
    block.right.forEach((x, depth) => (right[depth] = x + shift));
    block.left.forEach((x, depth) => (left[depth] ??= x + shift));
    roots.push(block.root + shift);
  }
  return { across, root: ((roots[0] ?? 0) + (roots[roots.length - 1] ?? 0)) / 2, left, right };
}

function blockOf(branch: GraphBranch, leaf: number): Block {
  const below = sideBySide(
    branch.children.map((child) => blockOf(child, leaf)),
    leaf
  );
  const { across, root } = below;
  across.set(branch.node.key, root);
  return { across, root, left: [root, ...below.left], right: [root, ...below.right] };
}

function depths(branches: readonly GraphBranch[], depth: number, found: Map<string, number>): Map<string, number> {
  for (const { node, children } of branches) {
    found.set(node.key, depth);
    depths(children, depth + 1, found);
  }
  return found;
}

/**
 * Places a forest in layers: every ion stands over the middle of those that hang on it, subtrees as close together as
 * they fit, and no two nodes of one layer come closer than a leaf step.
 * @returns position of each node's centre in pixels by its key
 */
export function layOut(roots: readonly GraphBranch[], direction: 'down' | 'right'): Map<string, Point> {
  const { leaf, layer } = STEPS[direction];
  const { across } = sideBySide(
    roots.map((root) => blockOf(root, leaf)),
    leaf
  );
  const depth = depths(roots, 0, new Map());
  return new Map(
    [...across].map(([key, x]) => {
      const along = (depth.get(key) ?? 0) * layer;
      return [key, direction === 'down' ? { x, y: along } : { x: along, y: x }];
    })
  );
}

/** Layers go down while the tree is narrow, and to the right where that fits a window of this aspect better. */
export function directionOf(roots: readonly GraphBranch[], aspect: number): 'down' | 'right' {
  const fit = (direction: 'down' | 'right') => {
    const points = [...layOut(roots, direction).values()];
    const span = (pick: (p: Point) => number) => Math.max(...points.map(pick)) - Math.min(...points.map(pick));
    return points.length ? Math.min(aspect / (span((p) => p.x) + 100), 1 / (span((p) => p.y) + 30)) : 0;
  };
  return fit('down') >= fit('right') ? 'down' : 'right';
}

/** Half of a label with its mark, px at zoom 1. */
const HALF = { x: 56, y: 22 };

/** The zoom at which the whole of a graph is seen in a pane. @param pane width and height in px */
export function zoomToShow(roots: readonly GraphBranch[], pane: { width: number; height: number }): number {
  const points = [...layOut(roots, directionOf(roots, pane.width / pane.height)).values()];
  const reach = (values: number[], half: number) => Math.max(...values) - Math.min(...values) + 2 * half;
  const across = reach(
    points.map(({ x }) => x),
    HALF.x
  );
  const along = reach(
    points.map(({ y }) => y),
    HALF.y
  );
  return Math.min(pane.width / across, pane.height / along);
}
