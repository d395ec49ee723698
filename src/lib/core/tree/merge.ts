/** Merges the peaks of repeated scans. */
import type { AnalyserKind, PeakList } from '../model';
import { mergeWidth } from './tolerance';

export interface MergedPeaks {
  peaks: PeakList;
  /** number of scans that held each ion, parallel to `peaks`. */
  scanCounts: Uint16Array;
}

interface Point {
  mz: number;
  intensity: number;
  scan: number;
}

interface Ion {
  /** m/z of the most intense point. */
  seed: number;
  scans: Set<number>;
  weight: number;
  moment: number;
}

function allPoints(lists: readonly PeakList[]): Point[] {
  const points: Point[] = [];
  lists.forEach(({ mz, intensity }, scan) => {
    for (let i = 0; i < mz.length; i++) if (intensity[i] > 0) points.push({ mz: mz[i], intensity: intensity[i], scan });
  });
  return points.sort((a, b) => a.mz - b.mz || a.scan - b.scan);
}

/** Within a run of close points the most intense one gathers its neighbours, at most one of each scan; then the next. */
function gather(run: Point[], width: (mz: number) => number): Ion[] {
  const ions: Ion[] = [];
  const byIntensity = [...run].sort((a, b) => b.intensity - a.intensity || a.mz - b.mz || a.scan - b.scan);
  for (const point of byIntensity) {
    let best: Ion | null = null;
    for (const ion of ions) {
      const off = Math.abs(ion.seed - point.mz);
      if (off <= width(ion.seed) && !ion.scans.has(point.scan) && (!best || off < Math.abs(best.seed - point.mz)))
        best = ion;
    }
    if (!best) {
      best = { seed: point.mz, scans: new Set(), weight: 0, moment: 0 };
      ions.push(best);
    }
    best.scans.add(point.scan);
    best.weight += point.intensity;
    best.moment += point.intensity * point.mz;
  }
  return ions;
}

function single({ mz, intensity }: PeakList): MergedPeaks {
  const kept = { mz: mz.filter((_mz, i) => intensity[i] > 0), intensity: intensity.filter((value) => value > 0) };
  return { peaks: kept, scanCounts: new Uint16Array(kept.mz.length).fill(1) };
}

/**
 * Merges peak lists to one: m/z is the intensity-weighted mean; intensity the mean over all lists (a list without the
 * ion counts as zero), so it stays on the scale of a single scan. Peaks of zero intensity are left out. One list alone
 * comes back as measured.
 */
export function mergePeaks(lists: readonly PeakList[], analyser: AnalyserKind): MergedPeaks {
  if (lists.length === 1) return single(lists[0]);
  const width = (mz: number): number => mergeWidth(analyser, mz);
  const points = allPoints(lists);
  const ions: Ion[] = [];
  let run: Point[] = [];
  for (const point of points) {
    if (run.length > 0 && point.mz - run[run.length - 1].mz > width(point.mz)) {
      ions.push(...gather(run, width));
      run = [];
    }
    run.push(point);
  }
  ions.push(...gather(run, width));
  ions.sort((a, b) => a.moment / a.weight - b.moment / b.weight);
  return {
    peaks: {
      mz: Float64Array.from(ions, (ion) => ion.moment / ion.weight),
      intensity: Float64Array.from(ions, (ion) => ion.weight / lists.length)
    },
    scanCounts: Uint16Array.from(ions, (ion) => Math.min(65535, ion.scans.size))
  };
}
