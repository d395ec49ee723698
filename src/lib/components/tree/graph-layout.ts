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

export const STEPS: LayoutSteps = { down: { leaf: 116, layer: 66 }, right: { leaf: 38, layer: 176 } };

const leavesOf = (branch: GraphBranch): number =>
  branch.children.length ? branch.children.reduce((sum, child) => sum + leavesOf(child), 0) : 1;
const depthOf = (branch: GraphBranch): number => 1 + Math.max(0, ...branch.children.map(depthOf));

/** Layers go down while the tree is narrow, and to the right once its leaves outnumber what fits side by side. */
export function directionOf(roots: readonly GraphBranch[], aspect: number): 'down' | 'right' {
  const leaves = roots.reduce((sum, root) => sum + leavesOf(root), 0);
  const depth = Math.max(1, ...roots.map(depthOf));
  const fit = (width: number, height: number) => Math.min(aspect / width, 1 / height);
  const down = fit(leaves * STEPS.down.leaf, depth * STEPS.down.layer);
  const right = fit(depth * STEPS.right.layer, leaves * STEPS.right.leaf);
  return down >= right ? 'down' : 'right';
}

/**
 * Places a forest in layers: every leaf gets its own step, every ion stands over the middle of those that hang on it,
 * and no two nodes of one layer come closer than a leaf step.
 * @returns position of each node's centre in pixels by its key
 */
export function layOut(roots: readonly GraphBranch[], direction: 'down' | 'right'): Map<string, Point> {
  const { leaf, layer } = STEPS[direction];
  const at = new Map<string, Point>();
  let next = 0;
  const place = (branch: GraphBranch, depth: number): number => {
    const below = branch.children.map((child) => place(child, depth + 1));
    const across = below.length ? (below[0] + below[below.length - 1]) / 2 : next++ * leaf;
    const along = depth * layer;
    at.set(branch.node.key, direction === 'down' ? { x: across, y: along } : { x: along, y: across });
    return across;
  };
  for (const root of roots) place(root, 0);
  return at;
}
