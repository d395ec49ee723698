import { type Composition, type PeakList, type Tolerance } from '../model';
import { windowAt } from '../formula/tolerance';
import { ionIsotopePeaks } from './pattern';

export interface IsotopeNoise {
  /** relative standard deviation of a measured peak's intensity. */
  relative: number;
  /** absolute standard deviation as a share of the base peak: limits how much weak peaks say. */
  absolute: number;
  /** peaks below this share of the base peak may be missing without telling anything. */
  detection: number;
}

/** Intensity errors of 5 % and a detection limit of half a per cent are usual for MS1 averages. */
export const DEFAULT_ISOTOPE_NOISE: IsotopeNoise = { relative: 0.05, absolute: 0.003, detection: 0.005 };

/** Isotope peaks beyond the fifth say little and are often cut off by the MS1 window. */
const MAX_OFFSET = 5;
/** Deviations count at most this many standard deviations: one disturbed peak must not decide alone. */
const MAX_SIGMAS = 5;

const tallest = (ms1: PeakList, mz: number, window: number): number => {
  let best = 0;
  for (let i = 0; i < ms1.mz.length; i++) {
    if (Math.abs(ms1.mz[i] - mz) <= window && ms1.intensity[i] > best) best = ms1.intensity[i];
  }
  return best;
};

/**
 * Log-likelihood (natural log, at most 0) of the MS1 peaks around an ion under its composition: Gaussian errors of
 * the intensities relative to the fitted total. Each expected peak above the detection limit counts; one that is
 * missing counts as intensity 0.
 * @returns null when MS1 does not show the monoisotopic peak and one further expected isotope position, so that
 *   nothing can be said
 */
export function isotopeLogLikelihood(
  ms1: PeakList,
  ion: Composition,
  charge: number,
  tolerance: Tolerance,
  noise: IsotopeNoise = DEFAULT_ISOTOPE_NOISE
): number | null {
  const expected = ionIsotopePeaks(ion, charge, 1e-4).filter((p) => p.offset >= 0 && p.offset <= MAX_OFFSET);
  if (expected.length < 2 || ms1.mz.length === 0) return null;
  const reach = Math.max(...ms1.mz);
  const measured = expected.map((p) => tallest(ms1, p.mz, windowAt(tolerance, p.mz)));
  if (measured[0] === 0) return null;
  const inReach = expected.map((p) => p.mz <= reach + 1 / Math.abs(charge));
  const most = Math.max(...expected.map((p) => p.relative));
  const shown = measured.reduce((a, b) => Math.max(a, b), 0);
  const compared = expected.flatMap((p, i) => {
    const share = p.relative / most;
    const seen = measured[i] / shown;
    return inReach[i] && (share >= noise.detection || seen >= noise.detection) ? [{ share, seen }] : [];
  });
  if (compared.length < 2) return null;
  const weight = ({ share }: { share: number }) => 1 / ((noise.relative * share) ** 2 + noise.absolute ** 2);
  // weighted least squares for the scale between the two patterns
  const top = compared.reduce((s, c) => s + weight(c) * c.share * c.seen, 0);
  const bottom = compared.reduce((s, c) => s + weight(c) * c.share * c.share, 0);
  const scale = top / bottom;
  return compared.reduce((sum, c) => {
    const sigmas = Math.min(MAX_SIGMAS, Math.abs(c.seen - scale * c.share) * Math.sqrt(weight(c)));
    return sum - (sigmas * sigmas) / 2;
  }, 0);
}

/** Charge numbers that isotope spacing can tell apart in MS1. */
const CHARGES = [1, 2, 3, 4];

/**
 * Charge number from the spacing of the isotope peaks above an ion, or null when no spacing fits. A higher charge
 * is taken only when its own positions between those of lower charges are filled.
 */
export function chargeFromSpacing(ms1: PeakList, mz: number, tolerance: Tolerance): number | null {
  const window = Math.max(windowAt(tolerance, mz), 0.005);
  const base = tallest(ms1, mz, window);
  if (base === 0) return null;
  for (const charge of [...CHARGES].reverse()) {
    const first = tallest(ms1, mz + 1.003355 / charge, window);
    const second = tallest(ms1, mz + 2.00671 / charge, window);
    if (first > 0.05 * base && (charge === 1 || second > 0.01 * base)) return charge;
  }
  return null;
}
