import { type AnalyserKind, type Tolerance } from '../model';

/**
 * Search windows by analyser: the width within which the right formula is expected, about three standard
 * deviations of ordinary calibration. The floor in mDa matters below m/z 200, where a ppm window becomes
 * narrower than the peak can be located. Ion traps and quadrupoles are read at unit resolution.
 */
const WINDOWS: Readonly<Record<AnalyserKind, Tolerance>> = {
  orbitrap: { ppm: 10, mda: 1 },
  'ft-icr': { ppm: 5, mda: 0.5 },
  tof: { ppm: 15, mda: 2.5 },
  sector: { ppm: 10, mda: 2 },
  quadrupole: { ppm: 10, mda: 400 },
  'ion-trap': { ppm: 10, mda: 400 },
  unknown: { ppm: 10, mda: 2 }
};

/** Half windows above this many mDa are unit resolution: the mass alone tells no formula. */
const UNIT_RESOLUTION_MDA = 50;

/** The default search window of an analyser, in ppm and mDa; the larger of the two holds at each m/z. */
export function toleranceFor(analyser: AnalyserKind): Tolerance {
  return WINDOWS[analyser];
}

/** Half width of the window at an m/z, in m/z units: max(ppm · mz · 1e-6, mda · 1e-3). */
export function windowAt(tolerance: Tolerance, mz: number): number {
  return Math.max(tolerance.ppm * mz * 1e-6, tolerance.mda * 1e-3);
}

/** True when a window is so wide that formulas must be argued from their relations, not from the mass. */
export function isUnitResolution(tolerance: Tolerance): boolean {
  return tolerance.mda >= UNIT_RESOLUTION_MDA;
}

/** Relative deviation of a found from a calculated m/z, in ppm. */
export function errorPpm(found: number, calculated: number): number {
  return ((found - calculated) / calculated) * 1e6;
}
