/** How far apart two m/z may lie and still be the same ion, by the analyser that measured them. */
import type { AnalyserKind, ScanHeader } from '../model';

/** Analysers of unit resolution, and those that resolve much better. Spectra of the two kinds are never merged. */
export type Resolution = 'unit' | 'high';

/** ppm and the least absolute width in m/z; the larger of the two holds. */
const WIDTHS: Readonly<Record<AnalyserKind, readonly [ppm: number, absolute: number]>> = {
  'ft-icr': [5, 0.001],
  orbitrap: [8, 0.0015],
  tof: [15, 0.003],
  sector: [15, 0.003],
  unknown: [20, 0.005],
  'ion-trap': [0, 0.3],
  quadrupole: [0, 0.3]
};

export function resolutionOf(analyser: AnalyserKind): Resolution {
  return analyser === 'ion-trap' || analyser === 'quadrupole' ? 'unit' : 'high';
}

/** Half width in m/z within which peaks of repeated scans are one ion. */
export function mergeWidth(analyser: AnalyserKind, mz: number): number {
  const [ppm, absolute] = WIDTHS[analyser];
  return Math.max(absolute, mz * ppm * 1e-6);
}

/**
 * Half width in m/z within which two isolated m/z are the same precursor ion. They were picked in the spectrum one
 * stage above, so its analyser decides; instruments round what they write, hence at least 0.01.
 */
export function isolationWidth(above: AnalyserKind, mz: number): number {
  return Math.max(0.01, mergeWidth(above, mz));
}

/** Half widths of the window around the isolated m/z in which the ion is looked for in the spectrum above. */
export function searchWindow(header: ScanHeader, target: number, above: AnalyserKind): [low: number, high: number] {
  const record = header.precursors.find((precursor) => precursor.isolation?.target === target);
  const fallback = resolutionOf(above) === 'unit' ? 0.7 : 0.02;
  const lower = record?.isolation?.lower ?? fallback;
  const upper = record?.isolation?.upper ?? fallback;
  return [target - lower, target + upper];
}
