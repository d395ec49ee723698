import type { PeakList } from '../model';
import { matchPeaks } from './match';

/**
 * Spectral entropy in nats of the intensities normalised to a sum of 1; 0 for an empty spectrum.
 * @see Nat. Methods 18, 1524 (2021)
 */
export function spectralEntropy(intensities: ArrayLike<number>): number {
  let total = 0;
  for (let i = 0; i < intensities.length; i++) total += intensities[i];
  let entropy = 0;
  for (let i = 0; i < intensities.length; i++) {
    const p = intensities[i] / total;
    if (p > 0) entropy -= p * Math.log(p);
  }
  return entropy;
}

/** Intensities normalised to a sum of 1; spectra with an entropy below 3 are flattened, I^(0.25 + 0.25 S). */
function prepared(intensity: Float64Array, weighted: boolean): Float64Array {
  const entropy = spectralEntropy(intensity);
  const power = weighted && entropy < 3 ? 0.25 + 0.25 * entropy : 1;
  const raised = intensity.map((value) => value ** power);
  const total = raised.reduce((sum, value) => sum + value, 0);
  return total > 0 ? raised.map((value) => value / total) : raised;
}

/**
 * Entropy similarity of two spectra, 0..1.
 * @param tolerance half width of a match in m/z at an m/z
 * @param weighted flatten spectra of low entropy first, as the paper does
 * @see Nat. Methods 18, 1524 (2021)
 */
export function entropySimilarity(
  a: PeakList,
  b: PeakList,
  tolerance: (mz: number) => number,
  weighted = true
): number {
  if (!a.mz.length || !b.mz.length) return 0;
  const pa = prepared(a.intensity, weighted);
  const pb = prepared(b.intensity, weighted);
  const partner = new Map(matchPeaks(a, b, tolerance).map((pair) => [pair.a, pair.b]));
  const matched = new Set(partner.values());
  const mixed: number[] = [];
  for (let i = 0; i < pa.length; i++) {
    const j = partner.get(i);
    mixed.push((pa[i] + (j === undefined ? 0 : pb[j])) / 2);
  }
  for (let j = 0; j < pb.length; j++) if (!matched.has(j)) mixed.push(pb[j] / 2);
  const distance = (2 * spectralEntropy(mixed) - spectralEntropy(pa) - spectralEntropy(pb)) / Math.log(4);
  return Math.min(1, Math.max(0, 1 - distance));
}
