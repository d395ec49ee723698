/** One confident ion: where it was found and how far off, in ppm (found − calculated). */
export interface MassErrorPoint {
  mz: number;
  errorPpm: number;
}

/** Robust line through mass errors: error(mz) = shift + slope · (mz − centre) ppm. */
export interface MassErrorFit {
  /** ppm at `centre`. */
  shift: number;
  /** ppm per m/z; 0 when too few points or too narrow a range to tell. */
  slope: number;
  /** m/z about which the line is written (median of the points). */
  centre: number;
  /** robust standard deviation of the residuals, ppm (1.4826 · median absolute deviation). */
  spread: number;
  points: number;
  /** indices of points more than four spreads away. */
  outliers: number[];
}

const MIN_POINTS = 4;
/** A trend needs at least this many points over this span of m/z; otherwise only a shift is told. */
const MIN_TREND_POINTS = 8;
const MIN_TREND_SPAN = 60;
const MAD_TO_SIGMA = 1.4826;
const OUTLIER_SPREADS = 4;

/** Median of a non-empty array. */
export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  return sorted.length % 2 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}

/** Median of the slopes between all pairs of points that differ in m/z. */
function theilSen(points: readonly MassErrorPoint[]): number {
  const slopes: number[] = [];
  for (let i = 0; i < points.length; i++)
    for (let j = i + 1; j < points.length; j++) {
      const span = points[j].mz - points[i].mz;
      if (span !== 0) slopes.push((points[j].errorPpm - points[i].errorPpm) / span);
    }
  return slopes.length ? median(slopes) : 0;
}

/**
 * Robust shift and trend of the mass error; up to a quarter of the points may be wrong without moving it much.
 * @returns null with fewer than four points
 * @see Theil–Sen estimator: Sen, J. Am. Stat. Assoc. 63, 1379 (1968)
 */
export function fitMassError(points: readonly MassErrorPoint[]): MassErrorFit | null {
  if (points.length < MIN_POINTS) return null;
  const mzs = points.map((point) => point.mz);
  const centre = median(mzs);
  const trend = points.length >= MIN_TREND_POINTS && Math.max(...mzs) - Math.min(...mzs) >= MIN_TREND_SPAN;
  const slope = trend ? theilSen(points) : 0;
  const shift = median(points.map((point) => point.errorPpm - slope * (point.mz - centre)));
  const residuals = points.map((point) => point.errorPpm - shift - slope * (point.mz - centre));
  const spread = MAD_TO_SIGMA * median(residuals.map(Math.abs));
  const outliers = residuals.flatMap((r, i) => (spread > 0 && Math.abs(r) > OUTLIER_SPREADS * spread ? [i] : []));
  return { shift, slope, centre, spread, points: points.length, outliers };
}

/** Mass error that the fit predicts at an m/z, in ppm. */
export const predictedError = (fit: Pick<MassErrorFit, 'shift' | 'slope' | 'centre'>, mz: number): number =>
  fit.shift + fit.slope * (mz - fit.centre);

/** Corrected m/z: what was found less the predicted error. Undo it with the stored fit, never by rounding back. */
export const correctedMz = (fit: Pick<MassErrorFit, 'shift' | 'slope' | 'centre'>, mz: number): number =>
  mz / (1 + predictedError(fit, mz) * 1e-6);
