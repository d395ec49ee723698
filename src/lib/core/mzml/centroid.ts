/**
 * Profile spectra to centroids. A local maximum above the noise floor is a peak; its apex is interpolated by a Gaussian
 * through the three highest points (a parabola through their logarithms): Gasior and Gonzalez, "Improving FFT frequency
 * measurement resolution by parabolic and Gaussian spectrum interpolation", AIP Conf. Proc. 732, 276-285 (2004).
 * The centroid's intensity is the height of that Gaussian, in the unit of the file.
 */
import type { PeakList } from '../model';

/** Points of a profile peak lie closer than this (m/z); centroids of one spectrum practically never do. */
const WIDEST_SAMPLING = 0.2;
const JUDGED_MAXIMA = 30;
const FEWEST_POINTS = 8;
/** A valley must fall below this share of the lower of two maxima for them to count as two peaks. */
const VALLEY = 0.9;

function localMaxima(intensity: Float64Array): number[] {
  const found: number[] = [];
  for (let i = 1; i < intensity.length - 1; i++) {
    if (intensity[i] > 0 && intensity[i] > intensity[i - 1] && intensity[i] >= intensity[i + 1]) found.push(i);
  }
  return found;
}

/** True when the point has neighbours at even, narrow spacing that share its hump. */
function looksSampled({ mz, intensity }: PeakList, i: number): boolean {
  const left = mz[i] - mz[i - 1];
  const right = mz[i + 1] - mz[i];
  const wider = Math.max(left, right);
  if (wider > WIDEST_SAMPLING || Math.min(left, right) < wider * 0.6) return false;
  return Math.min(intensity[i - 1], intensity[i + 1]) > intensity[i] * 0.15;
}

/**
 * Share (0 to 1) of the highest local maxima that look sampled from a continuous signal, or null when there are too few
 * points to tell.
 */
export function sampledShare(peaks: PeakList): number | null {
  if (peaks.mz.length < FEWEST_POINTS) return null;
  const maxima = localMaxima(peaks.intensity).sort((a, b) => peaks.intensity[b] - peaks.intensity[a]);
  const judged = maxima.slice(0, JUDGED_MAXIMA);
  if (judged.length === 0) return null;
  return judged.filter((i) => looksSampled(peaks, i)).length / judged.length;
}

/** True when most points lie farther apart than any sampling of a profile. */
function isSparse(mz: Float64Array): boolean {
  let wide = 0;
  for (let i = 1; i < mz.length; i++) if (mz[i] - mz[i - 1] > 2 * WIDEST_SAMPLING) wide++;
  return wide * 2 > mz.length - 1;
}

/** Decides between centroid and profile; the flag of the file is overruled only by a clear picture of the data. */
export function isCentroided(peaks: PeakList, flag: boolean | null): boolean {
  if (flag === true && isSparse(peaks.mz)) return true;
  const share = sampledShare(peaks);
  if (flag === true) return !(share !== null && share >= 0.8 && peaks.mz.length >= 50);
  if (flag === false) return isSparse(peaks.mz) || (share !== null && share <= 0.1 && peaks.mz.length >= 20);
  return share === null || share < 0.5;
}

/** Noise floor: three times the median of the lower quarter of the points above zero. */
function noiseFloor(intensity: Float64Array): number {
  const positive = intensity.filter((value) => value > 0).sort();
  return positive.length < 40 ? 0 : positive[Math.floor(positive.length / 8)] * 3;
}

/** Apex of the Gaussian through points i-1, i, i+1 at (nearly) even spacing: [m/z, height]. */
function gaussianApex({ mz, intensity }: PeakList, i: number): [number, number] {
  const a = intensity[i - 1];
  const b = intensity[i];
  const c = intensity[i + 1];
  const step = (mz[i + 1] - mz[i - 1]) / 2;
  if (a <= 0 || c <= 0 || step <= 0) {
    const sum = a + b + c;
    return [(a * mz[i - 1] + b * mz[i] + c * mz[i + 1]) / sum, b];
  }
  const la = Math.log(a);
  const lb = Math.log(b);
  const lc = Math.log(c);
  const curvature = la - 2 * lb + lc;
  const shift = curvature < 0 ? (0.5 * (la - lc)) / curvature : 0;
  return [mz[i] + shift * step, Math.exp(lb - 0.25 * (la - lc) * shift)];
}

/** Lowest intensity between two indexes. */
function valley(intensity: Float64Array, from: number, to: number): number {
  let lowest = Infinity;
  for (let i = from; i <= to; i++) lowest = Math.min(lowest, intensity[i]);
  return lowest;
}

/** Keeps, of maxima without a real valley between them, the highest. */
function separate(intensity: Float64Array, maxima: number[]): number[] {
  const kept: number[] = [];
  for (const i of maxima) {
    const before = kept.at(-1);
    if (before === undefined) kept.push(i);
    else if (valley(intensity, before, i) < VALLEY * Math.min(intensity[before], intensity[i])) kept.push(i);
    else if (intensity[i] > intensity[before]) kept[kept.length - 1] = i;
  }
  return kept;
}

/**
 * Centroids of a profile spectrum.
 * @param peaks sampled signal, sorted by m/z
 * @returns one peak for each maximum above the noise floor, sorted by m/z
 */
export function centroid(peaks: PeakList): PeakList {
  const { mz, intensity } = peaks;
  const floor = noiseFloor(intensity);
  const maxima = localMaxima(intensity).filter(
    (i) =>
      intensity[i] >= floor && mz[i + 1] - mz[i - 1] <= 4 * WIDEST_SAMPLING && intensity[i - 1] + intensity[i + 1] > 0
  );
  const apexes = separate(intensity, maxima).map((i) => gaussianApex(peaks, i));
  return {
    mz: Float64Array.from(apexes, (apex) => apex[0]),
    intensity: Float64Array.from(apexes, (apex) => apex[1])
  };
}
