/** Joins every scan to the scan it was isolated from. */
import type { PeakList, RunWarning, ScanHeader, TreeSpectrum } from '../model';
import { WarningCollector } from '../mzml';
import { ownPrecursor, type OwnPrecursor } from './own-precursor';
import { isolationWidth, searchWindow } from './tolerance';

export type LinkedBy = TreeSpectrum['linkedBy'];

/** Peaks of the scan at that position of the list of headers; null when they are not at hand. */
export type PeaksOf = (position: number) => PeakList | null;

export interface LinkedScan {
  /** position in the list of headers. */
  position: number;
  header: ScanHeader;
  own: OwnPrecursor;
  /** position of the scan it was isolated from; null when it is not in the file. */
  parent: number | null;
  linkedBy: LinkedBy;
  /** isolated m/z of every stage above; null when unknown. */
  path: number[] | null;
}

export interface Links {
  linked: LinkedScan[];
  orphans: { header: ScanHeader; reason: string }[];
  warnings: RunWarning[];
}

/** How many scans of the stage above are looked at, backwards and then forwards. */
const LOOK_BACK = 3000;
const LOOK_AHEAD = 300;

/** True when an ion lies in the window. Peaks are sorted by m/z. */
export function holdsIon(peaks: PeakList, low: number, high: number): boolean {
  let from = 0;
  let to = peaks.mz.length;
  while (from < to) {
    const middle = (from + to) >> 1;
    if (peaks.mz[middle] < low) from = middle + 1;
    else to = middle;
  }
  for (; from < peaks.mz.length && peaks.mz[from] <= high; from++) if (peaks.intensity[from] > 0) return true;
  return false;
}

class Linker {
  private readonly positions = new Map<string, number>();
  private readonly byPosition = new Map<number, LinkedScan>();
  private readonly warnings = new WarningCollector();
  private readonly orphans: Links['orphans'] = [];

  constructor(
    private readonly headers: readonly ScanHeader[],
    private readonly peaksOf: PeaksOf
  ) {
    headers.forEach((header, position) => {
      if (!this.positions.has(header.id)) this.positions.set(header.id, position);
    });
  }

  run(): Links {
    const levels = new Map<number, number[]>();
    this.headers.forEach((header, position) => {
      const list = levels.get(header.level);
      if (list) list.push(position);
      else levels.set(header.level, [position]);
    });
    const stages = [...levels.keys()].filter((level) => level >= 2).sort((a, b) => a - b);
    for (const level of stages) {
      const above = (levels.get(level - 1) ?? []).filter((position) => level === 2 || this.byPosition.has(position));
      for (const position of levels.get(level) ?? []) this.link(position, above);
    }
    const linked = [...this.byPosition.values()].sort((a, b) => a.position - b.position);
    return { linked, orphans: this.orphans, warnings: this.warnings.list };
  }

  private link(position: number, above: readonly number[]): void {
    const header = this.headers[position];
    const own = ownPrecursor(header, (id) => this.headers[this.positions.get(id) ?? -1]?.level);
    if (!own) {
      this.orphans.push({ header, reason: 'The scan names no isolated m/z' });
      return;
    }
    if (own.notches > 1) {
      this.warnings.add(
        'several-ions-isolated',
        'Several ions were isolated together; the first is used for the path',
        header.id
      );
    }
    const scan: LinkedScan = { position, header, own, parent: null, linkedBy: 'none', path: own.path };
    this.findParent(scan, above);
    const parent = scan.parent === null ? undefined : this.byPosition.get(scan.parent);
    if (header.level > 2 && parent?.path) scan.path = [...parent.path, own.target];
    if (scan.path === null) {
      this.orphans.push({ header, reason: this.orphanReason(header, own) });
      return;
    }
    this.byPosition.set(position, scan);
  }

  private findParent(scan: LinkedScan, above: readonly number[]): void {
    const { own, header } = scan;
    scan.parent = this.byReference(scan);
    if (scan.parent !== null) scan.linkedBy = 'reference';
    else if (header.level > 2) {
      scan.parent = own.path ? this.byPath(scan, own.path.slice(0, -1), above) : this.byIon(scan, above);
      scan.linkedBy = own.path ? (own.pathFrom ?? 'none') : scan.parent === null ? 'none' : 'isolated-mz';
      if (scan.linkedBy === 'isolated-mz') {
        this.warnings.add(
          'joined-by-mz',
          'The scan names no scan it came from; it was joined to the last scan of the stage above that holds its ion',
          header.id
        );
      }
    }
  }

  private byReference(scan: LinkedScan): number | null {
    const reference = scan.own.record?.spectrumRef ?? null;
    if (reference === null) return null;
    const position = this.positions.get(reference);
    const level = position === undefined ? undefined : this.headers[position].level;
    if (position === undefined || level !== scan.header.level - 1) {
      // A run filtered to some stages leaves references into the void; only MS3 and higher lose something by it.
      if (level !== undefined || scan.header.level > 2) {
        this.warnings.add(
          'bad-reference',
          'The scan refers to a scan that is not there or of the wrong stage',
          scan.header.id
        );
      }
      return null;
    }
    return level === 1 || this.byPosition.has(position) ? position : null;
  }

  private samePolarity(a: ScanHeader, b: ScanHeader): boolean {
    return a.polarity === b.polarity || a.polarity === null || b.polarity === null;
  }

  /** The nearest scan of the stage above, earlier ones first, for which `fits` holds. */
  private nearest(scan: LinkedScan, above: readonly number[], fits: (candidate: LinkedScan) => boolean): number | null {
    let low = 0;
    let high = above.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (above[middle] < scan.position) low = middle + 1;
      else high = middle;
    }
    const check = (i: number): boolean => {
      const candidate = this.byPosition.get(above[i]);
      return candidate !== undefined && this.samePolarity(candidate.header, scan.header) && fits(candidate);
    };
    for (let i = low - 1; i >= Math.max(0, low - LOOK_BACK); i--) if (check(i)) return above[i];
    for (let i = low; i < Math.min(above.length, low + LOOK_AHEAD); i++) if (check(i)) return above[i];
    return null;
  }

  private byPath(scan: LinkedScan, path: readonly number[], above: readonly number[]): number | null {
    return this.nearest(scan, above, (candidate) =>
      path.every((mz, stage) => {
        const width = isolationWidth(scan.header.analyser, mz);
        const stated = candidate.own.path?.[stage];
        const joined = candidate.path?.[stage];
        return [stated, joined].some((other) => other !== undefined && Math.abs(other - mz) <= width);
      })
    );
  }

  private byIon(scan: LinkedScan, above: readonly number[]): number | null {
    const { target } = scan.own;
    return this.nearest(scan, above, (candidate) => {
      const peaks = this.peaksOf(candidate.position);
      const [low, high] = searchWindow(scan.header, target, candidate.header.analyser);
      return peaks === null ? candidate.own.target > target : holdsIon(peaks, low, high);
    });
  }

  private orphanReason(header: ScanHeader, own: OwnPrecursor): string {
    const mz = own.target.toFixed(4);
    return `No MS${header.level - 1} scan in the file holds the isolated ion m/z ${mz}, and the scan names no other`;
  }
}

/**
 * Joins scans to the scans they were isolated from: by scan reference, by the list of precursors, by the filter string,
 * by the isolated m/z, in that order of trust.
 * @param headers scans in the order of the file
 * @param peaksOf peaks for the joining by isolated m/z
 */
export function linkScans(headers: readonly ScanHeader[], peaksOf: PeaksOf): Links {
  return new Linker(headers, peaksOf).run();
}
