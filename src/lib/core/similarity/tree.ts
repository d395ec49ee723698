/** What two trees are compared by: assigned ions and losses of each stage. */
export interface TreeSketch {
  /** stage → ion formulas in Hill order. */
  ions: ReadonlyMap<number, readonly string[]>;
  /** stage → loss formulas in Hill order. */
  losses: ReadonlyMap<number, readonly string[]>;
}

export interface TreeComparison {
  /** stage → formulas that both trees hold there, sorted. */
  sharedIons: Map<number, string[]>;
  sharedLosses: Map<number, string[]>;
  /** Jaccard index over (stage, formula), 0..1. */
  ionSimilarity: number;
  lossSimilarity: number;
}

const keys = (byStage: ReadonlyMap<number, readonly string[]>): Set<string> =>
  new Set([...byStage].flatMap(([stage, formulas]) => formulas.map((formula) => `${stage} ${formula}`)));

function jaccard(a: Set<string>, b: Set<string>): number {
  const shared = [...a].filter((key) => b.has(key)).length;
  const all = a.size + b.size - shared;
  return all === 0 ? 0 : shared / all;
}

function shared(a: ReadonlyMap<number, readonly string[]>, b: ReadonlyMap<number, readonly string[]>) {
  const found = new Map<number, string[]>();
  for (const [stage, formulas] of [...a].sort(([x], [y]) => x - y)) {
    const other = new Set(b.get(stage) ?? []);
    const both = [...new Set(formulas)].filter((formula) => other.has(formula)).sort();
    if (both.length) found.set(stage, both);
  }
  return found;
}

/** Shared ions and shared losses of two trees by stage, with the Jaccard index of each. Deterministic and symmetric. */
export function compareTrees(a: TreeSketch, b: TreeSketch): TreeComparison {
  return {
    sharedIons: shared(a.ions, b.ions),
    sharedLosses: shared(a.losses, b.losses),
    ionSimilarity: jaccard(keys(a.ions), keys(b.ions)),
    lossSimilarity: jaccard(keys(a.losses), keys(b.losses))
  };
}
