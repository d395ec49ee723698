import type { PeakList } from '../model';

export interface PeakPair {
  a: number;
  b: number;
}

/**
 * One-to-one matches of two sorted peak lists: pairs are taken by descending intensity product, so no peak matches twice.
 * @param tolerance half width in m/z at the m/z of `a`
 * @param shift added to the m/z of `b` before comparing (0, or the precursor difference)
 */
export function matchPeaks(a: PeakList, b: PeakList, tolerance: (mz: number) => number, shift = 0): PeakPair[] {
  const possible: (PeakPair & { product: number })[] = [];
  let from = 0;
  for (let i = 0; i < a.mz.length; i++) {
    const width = tolerance(a.mz[i]);
    while (from < b.mz.length && b.mz[from] + shift < a.mz[i] - width) from++;
    for (let j = from; j < b.mz.length && b.mz[j] + shift <= a.mz[i] + width; j++)
      possible.push({ a: i, b: j, product: a.intensity[i] * b.intensity[j] });
  }
  possible.sort((x, y) => y.product - x.product || x.a - y.a || x.b - y.b);
  const usedA = new Set<number>();
  const usedB = new Set<number>();
  const pairs: PeakPair[] = [];
  for (const pair of possible) {
    if (usedA.has(pair.a) || usedB.has(pair.b)) continue;
    usedA.add(pair.a);
    usedB.add(pair.b);
    pairs.push({ a: pair.a, b: pair.b });
  }
  return pairs;
}
