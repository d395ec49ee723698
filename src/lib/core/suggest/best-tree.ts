/**
 * The best-scoring colourful tree: at most one candidate (vertex) per ion (colour), each chosen vertex attached to
 * one chosen heavier vertex or to the root, the sum of vertex and edge weights maximal (maximum colourful subtree,
 * Bioinformatics 24, i49, 2008). Colours are ordered so that an edge always leads from an earlier to a later colour.
 */
export interface TreeEdge {
  /** vertex number of the parent; −1 for the root. */
  from: number;
  weight: number;
}

export interface TreeVertex {
  colour: number;
  score: number;
  /** every possible parent; weights are sorted falling by `solveTree`. */
  edges: TreeEdge[];
}

export interface TreeSolution {
  /** chosen vertex of each colour, −1 when the ion stays unexplained. */
  chosen: Int32Array;
  /** parent vertex of each colour's chosen vertex, −1 for the root. */
  parent: Int32Array;
  score: number;
  /** true when no tree can score higher. */
  proven: boolean;
  /** upper bound on the best score; equals `score` when proven. */
  bound: number;
}

export interface SolveLimits {
  /** vertices that branch and bound may look at before the best tree so far is returned. */
  maxWork: number;
}

const EPSILON = 1e-9;
/** Sweeps of the local search; each improves the score, so few are needed. */
const MAX_ROUNDS = 30;

/** Solves by local search, then proves or improves by branch and bound within the work limit. Deterministic. */
export function solveTree(colours: number, vertices: readonly TreeVertex[], limits: SolveLimits): TreeSolution {
  for (const v of vertices) v.edges.sort((a, b) => b.weight - a.weight || a.from - b.from);
  const search = new TreeSearch(colours, vertices);
  search.improveFrom(search.optimisticStart());
  search.improveFrom(search.rootStart());
  const bound = search.branch(limits.maxWork);
  const { chosen, parent, score } = search.result();
  return { chosen, parent, score, proven: bound <= score + EPSILON, bound: Math.max(bound, score) };
}

class TreeSearch {
  private readonly byColour: number[][];
  /** vertices that a vertex can be the parent of, with the edge weight. */
  private readonly children: { to: number; weight: number }[][];
  private best: Int32Array;
  private bestScore = 0;

  constructor(
    private readonly colours: number,
    private readonly vertices: readonly TreeVertex[]
  ) {
    this.byColour = Array.from({ length: colours }, () => []);
    this.children = vertices.map(() => []);
    vertices.forEach((v, to) => {
      this.byColour[v.colour].push(to);
      for (const { from, weight } of v.edges) if (from >= 0) this.children[from].push({ to, weight });
    });
    this.best = new Int32Array(colours).fill(-1);
  }

  /** Each colour takes the vertex that could score most if every parent were available. */
  optimisticStart(): Int32Array {
    return this.start((v) => v.score + (v.edges[0]?.weight ?? -Infinity));
  }

  /** Each colour takes the vertex that scores most below the root. */
  rootStart(): Int32Array {
    return this.start((v) => v.score + (v.edges.find((e) => e.from < 0)?.weight ?? -Infinity));
  }

  private start(worth: (v: TreeVertex) => number): Int32Array {
    return Int32Array.from(this.byColour, (list) => {
      let best = -1;
      let most = -Infinity;
      for (const i of list) {
        const value = worth(this.vertices[i]);
        if (value > most) [best, most] = [i, value];
      }
      return best;
    });
  }

  /** What a colour's vertex earns with its best chosen parent; 0 for none. */
  private earn(vertex: number, chosen: Int32Array): number {
    if (vertex < 0) return 0;
    const v = this.vertices[vertex];
    for (const { from, weight } of v.edges) {
      if (from < 0 || chosen[this.vertices[from].colour] === from) return v.score + weight;
    }
    return -Infinity;
  }

  /** Best edge of a vertex to the root or a chosen parent, leaving one vertex out. */
  private bestEdge(vertex: number, chosen: Int32Array, without: number): TreeEdge | null {
    for (const edge of this.vertices[vertex].edges) {
      if (edge.from < 0 || (edge.from !== without && chosen[this.vertices[edge.from].colour] === edge.from))
        return edge;
    }
    return null;
  }

  /** Changes one colour at a time while the whole score grows. */
  improveFrom(chosen: Int32Array): void {
    const weight = new Float64Array(this.colours);
    const parent = new Int32Array(this.colours);
    const refresh = () => {
      for (let c = 0; c < this.colours; c++) {
        const edge = chosen[c] < 0 ? null : this.bestEdge(chosen[c], chosen, -1);
        weight[c] = edge?.weight ?? 0;
        parent[c] = edge?.from ?? -1;
      }
    };
    refresh();
    for (let changed = true, rounds = 0; changed && rounds < MAX_ROUNDS; rounds++) {
      changed = false;
      for (let c = 0; c < this.colours; c++) {
        const before = chosen[c];
        const kept =
          before < 0 ? 0 : this.vertices[before].score + weight[c] + this.lossWithout(before, chosen, weight, parent);
        let best = before;
        let most = kept;
        for (const option of this.byColour[c]) {
          if (option === before) continue;
          const value = this.earn(option, chosen) + this.gainWith(option, before, chosen, weight, parent);
          if (value > most + EPSILON) [best, most] = [option, value];
        }
        if (most < -EPSILON) best = -1;
        if (best === before) continue;
        chosen[c] = best;
        refresh();
        changed = true;
      }
    }
    this.keep(chosen);
  }

  /** How much the ions below a chosen vertex would lose without it. */
  private lossWithout(vertex: number, chosen: Int32Array, weight: Float64Array, parent: Int32Array): number {
    let loss = 0;
    for (const { to } of this.children[vertex]) {
      const colour = this.vertices[to].colour;
      if (chosen[colour] !== to || parent[colour] !== vertex) continue;
      loss += weight[colour] - (this.bestEdge(to, chosen, vertex)?.weight ?? 0);
    }
    return loss;
  }

  /** How much other chosen ions would gain from a new vertex, compared with having none of its colour. */
  private gainWith(
    vertex: number,
    replaced: number,
    chosen: Int32Array,
    weight: Float64Array,
    parent: Int32Array
  ): number {
    let gain = 0;
    for (const { to, weight: offered } of this.children[vertex]) {
      const colour = this.vertices[to].colour;
      if (chosen[colour] !== to) continue;
      const orphaned = replaced >= 0 && parent[colour] === replaced;
      const now = orphaned ? (this.bestEdge(to, chosen, replaced)?.weight ?? 0) : weight[colour];
      if (offered > now) gain += offered - now;
    }
    return gain;
  }

  private keep(chosen: Int32Array): void {
    let score = 0;
    for (let c = 0; c < this.colours; c++) score += this.earn(chosen[c], chosen);
    if (score > this.bestScore) [this.best, this.bestScore] = [Int32Array.from(chosen), score];
  }

  /** Depth-first branch and bound over the colours in order; returns an upper bound on the best score. */
  branch(maxWork: number): number {
    const chosen = new Int32Array(this.colours).fill(-1);
    let work = 0;
    let open = -Infinity;
    const optimistic = (vertex: number, decided: number): number => {
      const v = this.vertices[vertex];
      for (const { from, weight } of v.edges) {
        if (from < 0) return v.score + weight;
        const colour = this.vertices[from].colour;
        if (colour >= decided || chosen[colour] === from) return v.score + weight;
      }
      return -Infinity;
    };
    const remaining = (decided: number): number => {
      let sum = 0;
      for (let c = decided; c < this.colours; c++) {
        let most = 0;
        for (const i of this.byColour[c]) most = Math.max(most, optimistic(i, decided));
        work += this.byColour[c].length;
        sum += most;
      }
      return sum;
    };
    const visit = (colour: number, score: number): void => {
      if (colour === this.colours) {
        if (score > this.bestScore + EPSILON) [this.best, this.bestScore] = [Int32Array.from(chosen), score];
        return;
      }
      const options = this.byColour[colour]
        .map((vertex) => ({ vertex, gain: this.earn(vertex, chosen) }))
        .concat({ vertex: -1, gain: 0 })
        .filter((o) => o.gain > -Infinity)
        .sort((a, b) => b.gain - a.gain || b.vertex - a.vertex);
      for (const { vertex, gain } of options) {
        chosen[colour] = vertex;
        const limit = score + gain + remaining(colour + 1);
        if (limit > this.bestScore + EPSILON) {
          if (work >= maxWork) open = Math.max(open, limit);
          else visit(colour + 1, score + gain);
        }
      }
      chosen[colour] = -1;
    };
    visit(0, 0);
    return Math.max(open, this.bestScore);
  }

  result(): { chosen: Int32Array; parent: Int32Array; score: number } {
    const parent = Int32Array.from(this.best, (vertex) => {
      if (vertex < 0) return -1;
      const edge = this.vertices[vertex].edges.find(
        (e) => e.from < 0 || this.best[this.vertices[e.from].colour] === e.from
      );
      return edge?.from ?? -1;
    });
    return { chosen: this.best, parent, score: this.bestScore };
  }
}
