import { parseFormula } from '$lib/core/chem';
import { ionIsotopePeaks } from '$lib/core/isotope';

/** One isotope peak: what the formula asks for and what MS1 shows, both as shares of the monoisotopic peak. */
export interface ComparedPeak {
  /** nominal distance from the monoisotopic peak, in neutrons */
  offset: number;
  mz: number;
  expected: number;
  /** 0 where MS1 shows nothing within the window */
  found: number;
}

const HIGHEST_OFFSET = 4;
/** Below this share of the monoisotopic peak nothing is expected to be seen. */
const FAINT = 0.005;
/** Half width in which a measured peak is taken for an expected one, ppm and at least m/z. */
const WINDOW = { ppm: 10, mz: 0.003 };

/**
 * The isotope pattern of an ion formula beside the measured one.
 * @param ionFormula all nuclei of the ion
 * @param charge signed charge number
 * @returns nothing where MS1 does not show the monoisotopic peak
 */
export function compareIsotopes(
  ms1: { mz: readonly number[]; intensity: readonly number[] },
  ionFormula: string,
  charge: number
): ComparedPeak[] {
  const peaks = ionIsotopePeaks(parseFormula(ionFormula), charge).filter(
    ({ offset }) => offset >= 0 && offset <= HIGHEST_OFFSET
  );
  const tallest = (at: number) => {
    const reach = Math.max(WINDOW.mz, at * WINDOW.ppm * 1e-6);
    return ms1.mz.reduce((most, mz, i) => (Math.abs(mz - at) <= reach ? Math.max(most, ms1.intensity[i]) : most), 0);
  };
  const base = peaks.find(({ offset }) => offset === 0);
  const measured = base ? tallest(base.mz) : 0;
  if (!base || measured === 0) return [];
  return peaks
    .map(({ offset, mz, relative }) => ({
      ...{ offset, mz, expected: relative / base.relative },
      found: tallest(mz) / measured
    }))
    .filter(({ expected, found }) => expected >= FAINT || found >= FAINT);
}
