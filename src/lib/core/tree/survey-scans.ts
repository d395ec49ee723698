/** The isotope pattern of a precursor ion from the MS1 scans nearest to its fragmentation. */
import type { PeakList, Scan } from '../model';
import type { PrecursorGroup } from './group';
import { mergePeaks } from './merge';

const BELOW = 1;
const BEYOND = 6;

function slice({ mz, intensity }: PeakList, low: number, high: number): PeakList {
  let from = 0;
  let to = mz.length;
  while (from < to) {
    const middle = (from + to) >> 1;
    if (mz[middle] < low) from = middle + 1;
    else to = middle;
  }
  let end = from;
  while (end < mz.length && mz[end] <= high) end++;
  return { mz: mz.slice(from, end), intensity: intensity.slice(from, end) };
}

/** MS1 scans by position, with a search for the nearest one of the same polarity. */
export class SurveyScans {
  private readonly positions: number[];

  constructor(private readonly scans: readonly Scan[]) {
    this.positions = scans.flatMap((scan, position) => (scan.level === 1 ? [position] : []));
  }

  /** The last MS1 scan before that position, else the first after it. */
  private nearest(position: number): number | null {
    const polarity = this.scans[position].polarity;
    let low = 0;
    let high = this.positions.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (this.positions[middle] < position) low = middle + 1;
      else high = middle;
    }
    const fits = (i: number): boolean => this.scans[this.positions[i]].polarity === polarity;
    for (let i = low - 1; i >= 0 && i > low - 20; i--) if (fits(i)) return this.positions[i];
    for (let i = low; i < this.positions.length && i < low + 20; i++) if (fits(i)) return this.positions[i];
    return null;
  }

  /** Merged peaks from m/z - 1 to m/z + 6 around the precursor ion; null when no MS1 scan holds any. */
  around(group: PrecursorGroup): PeakList | null {
    const positions = new Set<number>();
    for (const scan of group.spectra.flatMap((spectrum) => spectrum.scans)) {
      const referred = scan.header.level === 2 ? scan.parent : null;
      const position = referred ?? this.nearest(scan.position);
      if (position !== null) positions.add(position);
    }
    const ordered = [...positions].sort((a, b) => a - b);
    const lists = ordered.map((position) => slice(this.scans[position].peaks, group.mz - BELOW, group.mz + BEYOND));
    if (lists.every((list) => list.mz.length === 0)) return null;
    return mergePeaks(lists, this.scans[ordered[0]].analyser).peaks;
  }
}
