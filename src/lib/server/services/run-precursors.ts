import { randomUUID } from 'node:crypto';
import type { PeakList, ScanHeader } from '$lib/core/model';
import { surveyPrecursors } from '$lib/core/tree';
import type { runPrecursors } from '../db/schema';

/** Peaks of MSn scans kept for joining scans that name nothing but an isolated m/z; 16 bytes each. */
const KEPT_PEAKS = 3_000_000;

/** Holds the peaks of MSn scans up to a bound; beyond it scans are joined by what their headers say. */
export class PeakMemory {
  private readonly lists = new Map<number, PeakList>();
  private peaks = 0;

  /** @param position place of the scan among all headers */
  keep(position: number, level: number, peaks: PeakList): void {
    if (level < 2 || this.peaks + peaks.mz.length > KEPT_PEAKS) return;
    this.peaks += peaks.mz.length;
    this.lists.set(position, peaks);
  }

  readonly of = (position: number): PeakList | null => this.lists.get(position) ?? null;
}

/** Rows of the precursor ions of a run, with the positions of their scans and the strongest ion current (counts) of their MS2. */
export function precursorRows(runId: string, headers: ScanHeader[], memory: PeakMemory) {
  const byId = new Map<string, ScanHeader>();
  for (const header of headers) if (!byId.has(header.id)) byId.set(header.id, header);
  return surveyPrecursors(headers, memory.of).map((found, position): typeof runPrecursors.$inferInsert => {
    const own = found.scanIds.flatMap((id) => byId.get(id) ?? []);
    const ms2 = own.filter((header) => header.level === 2);
    const currents = (ms2.length ? ms2 : own).map((header) => header.totalIonCurrent);
    return {
      id: randomUUID(),
      runId,
      position,
      mz: found.mz,
      charge: found.charge,
      isolation: ms2[0]?.precursors[0]?.isolation ?? null,
      levels: found.levels,
      scanIndexes: own.map((header) => header.index),
      intensity: currents.length ? Math.max(...currents) : null
    };
  });
}
