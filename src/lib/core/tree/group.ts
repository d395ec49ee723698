/** Sorts joined scans into precursor ions, and within each into merged spectra of one path. */
import type { Polarity, RunWarning, ScanHeader } from '../model';
import { linkScans, type LinkedBy, type LinkedScan, type PeaksOf } from './link';
import { isolationWidth, resolutionOf } from './tolerance';

/** Scans that isolated the same path and are merged to one spectrum. */
export interface SpectrumGroup {
  level: number;
  path: number[];
  scans: LinkedScan[];
  /** position in `PrecursorGroup.spectra`; null when the spectrum above is not in the file. */
  parent: number | null;
  linkedBy: LinkedBy;
}

/** One precursor ion that the run fragments, with all spectra below it. */
export interface PrecursorGroup {
  /** isolated m/z of the MS2 stage (median over the scans). */
  isolatedMz: number;
  /** selected ion where given, else the isolated m/z. */
  mz: number;
  charge: number | null;
  polarity: Polarity | null;
  spectra: SpectrumGroup[];
}

export interface Grouping {
  groups: PrecursorGroup[];
  orphans: { header: ScanHeader; reason: string }[];
  warnings: RunWarning[];
}

const TRUST: readonly LinkedBy[] = ['reference', 'precursor-list', 'filter-string', 'isolated-mz', 'none'];

/** Farthest a selected ion may lie from the isolation target to be believed: a reassigned monoisotopic peak. */
const REASSIGNED = 3;

export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}

/** Splits items into runs whose values lie within `width` of the run's mean. */
function cluster<T>(items: readonly T[], value: (item: T) => number, width: (item: T) => number): T[][] {
  const sorted = [...items].sort((a, b) => value(a) - value(b));
  const runs: T[][] = [];
  let sum = 0;
  for (const item of sorted) {
    const run = runs.at(-1);
    if (run && value(item) - sum / run.length <= width(item)) {
      run.push(item);
      sum += value(item);
    } else {
      runs.push([item]);
      sum = value(item);
    }
  }
  return runs;
}

/** The commonest value, the smallest of equals; null when there is none. */
function commonest(values: readonly number[]): number | null {
  const counts = new Map<number, number>();
  for (const value of values) counts.set(value, (counts.get(value) ?? 0) + 1);
  const ranked = [...counts].sort((a, b) => b[1] - a[1] || a[0] - b[0]);
  return ranked[0]?.[0] ?? null;
}

/** Analyser of the spectrum in which the ion of that stage was picked. */
class Above {
  private readonly surveyAnalyser: ScanHeader['analyser'] | null;

  constructor(
    private readonly headers: readonly ScanHeader[],
    private readonly byPosition: ReadonlyMap<number, LinkedScan>
  ) {
    this.surveyAnalyser = headers.find((header) => header.level === 1)?.analyser ?? null;
  }

  analyser(scan: LinkedScan, stage: number): ScanHeader['analyser'] {
    let at: LinkedScan | undefined = scan;
    while (at && at.header.level > stage + 2 && at.parent !== null) at = this.byPosition.get(at.parent);
    const above = at && at.header.level === stage + 2 && at.parent !== null ? this.headers[at.parent] : undefined;
    return above?.analyser ?? (stage === 0 ? this.surveyAnalyser : null) ?? scan.header.analyser;
  }
}

/** First and last time of scans, s; null when none states one. */
export function timeSpan(scans: readonly LinkedScan[]): [number, number] | null {
  let span: [number, number] | null = null;
  for (const { time } of scans.map((scan) => scan.header)) {
    if (time !== null) span = span ? [Math.min(span[0], time), Math.max(span[1], time)] : [time, time];
  }
  return span;
}

function energyKey(header: ScanHeader): string {
  return header.precursors.map((record) => record.energy ?? '').join('/');
}

export interface GroupOptions {
  /** keep spectra of the same path but different energy apart. */
  separateEnergies: boolean;
}

/** Distinguishes spectra of one path that must not be merged. */
function mergeKey(scan: LinkedScan, options: GroupOptions): string {
  const own = scan.own.record;
  const energy = options.separateEnergies
    ? `${own?.energy ?? ''} ${own?.activations.join('+') ?? energyKey(scan.header)}`
    : '';
  return `${resolutionOf(scan.header.analyser)} ${energy}`;
}

/** Clusters by the m/z of one stage after the other; every leaf is one path. */
function splitByPath(
  scans: LinkedScan[],
  stage: number,
  above: Above,
  prefix: number[]
): { path: number[]; scans: LinkedScan[] }[] {
  const here = scans.filter((scan) => scan.header.level - 1 === stage);
  const deeper = scans.filter((scan) => scan.header.level - 1 > stage);
  const leaves = here.length > 0 ? [{ path: prefix, scans: here }] : [];
  const value = (scan: LinkedScan): number => scan.path?.[stage] ?? 0;
  const runs = cluster(deeper, value, (scan) => isolationWidth(above.analyser(scan, stage), value(scan)));
  for (const run of runs) {
    // The scan that isolated the ion itself knows it best; deeper ones only repeat it.
    const closest = run.filter((scan) => scan.header.level - 2 === stage);
    const mz = median((closest.length > 0 ? closest : run).map(value));
    leaves.push(...splitByPath(run, stage + 1, above, [...prefix, mz]));
  }
  return leaves;
}

function comparePaths(a: readonly number[], b: readonly number[]): number {
  for (let i = 0; i < Math.min(a.length, b.length); i++) if (a[i] !== b[i]) return a[i] - b[i];
  return a.length - b.length;
}

function toSpectra(leaves: { path: number[]; scans: LinkedScan[] }[], options: GroupOptions): SpectrumGroup[] {
  const spectra: SpectrumGroup[] = [];
  for (const leaf of leaves) {
    const parts = new Map<string, LinkedScan[]>();
    for (const scan of leaf.scans) {
      const key = mergeKey(scan, options);
      const part = parts.get(key);
      if (part) part.push(scan);
      else parts.set(key, [scan]);
    }
    for (const [, scans] of [...parts].sort(([a], [b]) => (a < b ? -1 : 1))) {
      scans.sort((a, b) => a.position - b.position);
      const linkedBy = TRUST.find((kind) => scans.some((scan) => scan.linkedBy === kind)) ?? 'none';
      spectra.push({ level: leaf.path.length + 1, path: leaf.path, scans, parent: null, linkedBy });
    }
  }
  spectra.sort((a, b) => a.level - b.level || comparePaths(a.path, b.path));
  setParents(spectra);
  return spectra;
}

/** The spectrum above is the one that holds most of the scans that the scans of this one were joined to. */
function setParents(spectra: SpectrumGroup[]): void {
  const holder = new Map<number, number>();
  spectra.forEach((spectrum, i) => spectrum.scans.forEach((scan) => holder.set(scan.position, i)));
  for (const spectrum of spectra) {
    if (spectrum.level === 2) continue;
    const parents = spectrum.scans.map((scan) => holder.get(scan.parent ?? -1)).filter((i) => i !== undefined);
    spectrum.parent = commonest(parents);
  }
}

function toGroup(scans: LinkedScan[], above: Above, options: GroupOptions): PrecursorGroup[] {
  const leaves = splitByPath(scans, 0, above, []);
  const byPrecursor = new Map<number, typeof leaves>();
  for (const leaf of leaves) {
    const list = byPrecursor.get(leaf.path[0]);
    if (list) list.push(leaf);
    else byPrecursor.set(leaf.path[0], [leaf]);
  }
  return [...byPrecursor].map(([isolatedMz, own]) => {
    const spectra = toSpectra(own, options);
    const records = spectra
      .filter((spectrum) => spectrum.level === 2)
      .flatMap((spectrum) => spectrum.scans)
      .map((scan) => scan.own.record)
      .filter((record) => record !== null);
    const selected = records
      .map((record) => record.selectedMz)
      .filter((mz) => mz !== null)
      .filter((mz) => Math.abs(mz - isolatedMz) <= REASSIGNED);
    return {
      isolatedMz,
      mz: selected.length > 0 ? median(selected) : isolatedMz,
      charge: commonest(records.map((record) => record.charge).filter((charge) => charge !== null)),
      polarity: scans[0].header.polarity,
      spectra
    };
  });
}

/**
 * Finds the precursor ions of a run and sorts every MSn scan into the spectrum of its path. Survey and assembly both
 * rest on this, so they agree.
 * @param headers all scans in the order of the file
 */
export function groupScans(headers: readonly ScanHeader[], peaksOf: PeaksOf, options: GroupOptions): Grouping {
  const { linked, orphans, warnings } = linkScans(headers, peaksOf);
  const above = new Above(headers, new Map(linked.map((scan) => [scan.position, scan])));
  const polarities = new Map<string, LinkedScan[]>();
  for (const scan of linked) {
    const key = scan.header.polarity ?? 'unknown';
    const list = polarities.get(key);
    if (list) list.push(scan);
    else polarities.set(key, [scan]);
  }
  const groups = [...polarities.values()].flatMap((scans) => toGroup(scans, above, options));
  groups.sort((a, b) => a.isolatedMz - b.isolatedMz || (a.polarity ?? '').localeCompare(b.polarity ?? ''));
  return { groups, orphans, warnings };
}
