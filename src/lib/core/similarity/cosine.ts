import type { PeakList } from '../model';
import { matchPeaks } from './match';

export interface CosineOptions {
  /** half width of a match in m/z at an m/z. */
  tolerance: (mz: number) => number;
  /** weight of a peak = (m/z)^mzPower · intensity^intensityPower; default 0 and 0.5 (common for MS/MS). */
  mzPower?: number;
  intensityPower?: number;
  /** precursor difference a − b: peaks may match shifted by it too (modified cosine, PNAS 109, E1743, 2012). */
  shift?: number;
}

/**
 * Cosine of two spectra, 0..1: sum of weight products of matched peaks over the norms of all peaks.
 * @see J. Am. Soc. Mass Spectrom. 5, 859 (1994)
 */
export function cosine(a: PeakList, b: PeakList, options: CosineOptions): number {
  const { tolerance, mzPower = 0, intensityPower = 0.5, shift = 0 } = options;
  const weigh = (list: PeakList) => list.mz.map((mz, i) => mz ** mzPower * list.intensity[i] ** intensityPower);
  const wa = weigh(a);
  const wb = weigh(b);
  const norm = Math.sqrt(squares(wa) * squares(wb));
  if (norm === 0) return 0;
  const direct = matchPeaks(a, b, tolerance);
  const pairs = shift ? unite(direct, matchPeaks(a, b, tolerance, shift), wa, wb) : direct;
  return pairs.reduce((sum, { a: i, b: j }) => sum + wa[i] * wb[j], 0) / norm;
}

const squares = (values: Float64Array): number => values.reduce((sum, value) => sum + value * value, 0);

/** The heavier of direct and shifted matches, still one-to-one. */
function unite(
  direct: { a: number; b: number }[],
  shifted: { a: number; b: number }[],
  wa: Float64Array,
  wb: Float64Array
): { a: number; b: number }[] {
  const all = [...direct, ...shifted].sort((x, y) => wa[y.a] * wb[y.b] - wa[x.a] * wb[x.b] || x.a - y.a || x.b - y.b);
  const usedA = new Set<number>();
  const usedB = new Set<number>();
  return all.filter(({ a, b }) => {
    if (usedA.has(a) || usedB.has(b)) return false;
    usedA.add(a);
    usedB.add(b);
    return true;
  });
}
