import { type AnalyserKind, type Tolerance } from '../model';
import { type IonFormula, type IonSpace } from './ion-space';
import { peakCandidates } from './peak-candidates';
import { type StageNode, type StagePeak } from './stages';
import { WEIGHTS } from './weights';

/** Standard deviation of the mass error expected of an analyser before the data are seen, ppm. */
const EXPECTED_PPM: Readonly<Record<AnalyserKind, number>> = {
  orbitrap: 2,
  'ft-icr': 1,
  tof: 4,
  sector: 3,
  quadrupole: 3,
  'ion-trap': 3,
  unknown: 3
};
/** Locating a centroid costs at least this much, m/z. */
const FLOOR = 0.0001;
/** The expectation weighs as much as this many ions. */
const PRIOR_IONS = 5;
/** Median of |x| of a standard normal variable. */
const MEDIAN_OF_NORMAL = 0.6745;

/** Expected standard deviation of an m/z, in m/z. At unit resolution and for asked windows a third of the window. */
export function expectedSigma(analyser: AnalyserKind, asked: Tolerance | null, mz: number, window: number): number {
  const sigma = asked ? window / WEIGHTS.windowSigmas : Math.hypot(EXPECTED_PPM[analyser] * mz * 1e-6, FLOOR);
  return window > 0.05 ? window / WEIGHTS.windowSigmas : Math.min(sigma, window / 2);
}

/**
 * Errors in ppm of the peaks of a stage that only one formula fits under an ion: these tell the width of the mass
 * error without having chosen any formula.
 */
export function unambiguousErrors(ions: IonSpace, node: StageNode, whole: IonFormula, sign: 1 | -1): number[] {
  return node.peaks
    .filter((peak) => peak.role === 'product')
    .flatMap((peak) => {
      const found = peakCandidates(ions, peak, whole, 1, sign, false);
      return found.length === 1 ? [found[0].errorPpm] : [];
    });
}

/** Sets the standard deviation of the accurate-mass peaks from errors, shrunk towards what was expected. */
export function adaptSigma(peaks: readonly StagePeak[], errors: readonly number[]): void {
  if (errors.length === 0) return;
  const sorted = errors.map(Math.abs).sort((a, b) => a - b);
  const measured = sorted[sorted.length >> 1] / MEDIAN_OF_NORMAL;
  for (const peak of peaks) {
    if (peak.window > 0.05) continue;
    const expected = (peak.sigma / peak.mz) * 1e6;
    const variance = (PRIOR_IONS * expected ** 2 + errors.length * measured ** 2) / (PRIOR_IONS + errors.length);
    peak.sigma = Math.hypot(Math.sqrt(variance) * peak.mz * 1e-6, FLOOR);
  }
}

/**
 * Narrows the widths for choosing among the formulas of one ion once the precursor's formula is settled: the mass
 * error of this very ion was measured, whereas loss statistics are averages over all of chemistry, so that they
 * should decide only between formulas of nearly equal error.
 */
export function sharpen(peaks: readonly StagePeak[]): void {
  for (const peak of peaks) if (peak.window <= 0.05) peak.sigma /= WEIGHTS.massEmphasis;
}
