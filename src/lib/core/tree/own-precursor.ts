/** What a scan itself says about the ions it was made from. */
import type { PrecursorRecord, ScanHeader } from '../model';
import { parseFilterString } from '../mzml';

export interface OwnPrecursor {
  /** the record of the ion isolated last; null where only the filter string names it. */
  record: PrecursorRecord | null;
  /** isolated m/z of the last stage. */
  target: number;
  /** number of ions isolated together in the last stage (1, or more in synchronous precursor selection). */
  notches: number;
  /** isolated m/z of every stage above, MS2 precursor ion first, where the scan states them all. */
  path: number[] | null;
  pathFrom: 'precursor-list' | 'filter-string' | null;
}

/** Stage of the scan with that id, or undefined when there is none. */
export type LevelOf = (id: string) => number | undefined;

/** Isolated m/z of a record: the window's target, else the selected ion. */
export function isolatedMz(record: PrecursorRecord): number | null {
  return record.isolation?.target ?? record.selectedMz;
}

/** Stage the ion of a record was isolated from: as stated, else by the scan it refers to. */
function stageOf(record: PrecursorRecord, levelOf: LevelOf): number | null {
  return record.level ?? (record.spectrumRef === null ? null : (levelOf(record.spectrumRef) ?? null));
}

/** The records of the last stage: those isolated from stage n - 1, else the last one; never blindly the first. */
function lastStage(records: PrecursorRecord[], level: number, levelOf: LevelOf): PrecursorRecord[] {
  const stated = records.filter((record) => stageOf(record, levelOf) === level - 1);
  if (stated.length > 0) return stated;
  const open = records.filter((record) => stageOf(record, levelOf) === null);
  return open.length > 0 ? open.slice(-1) : records.slice(-1);
}

function nearest(records: PrecursorRecord[], mz: number): PrecursorRecord | null {
  let best: PrecursorRecord | null = null;
  for (const record of records) {
    const off = Math.abs((isolatedMz(record) ?? Infinity) - mz);
    if (off < 0.02 && (best === null || off < Math.abs((isolatedMz(best) ?? 0) - mz))) best = record;
  }
  return best;
}

function pathFromList(records: PrecursorRecord[], level: number, target: number, levelOf: LevelOf): number[] | null {
  const path: number[] = [];
  for (let stage = 1; stage < level - 1; stage++) {
    const record = records.find((candidate) => stageOf(candidate, levelOf) === stage);
    const mz = record ? isolatedMz(record) : null;
    if (mz === null) return null;
    path.push(mz);
  }
  return [...path, target];
}

/** Reads a scan of stage 2 or higher; null when it names no isolated m/z at all. */
export function ownPrecursor(header: ScanHeader, levelOf: LevelOf): OwnPrecursor | null {
  const { level } = header;
  const stages = header.filterString === null ? [] : parseFilterString(header.filterString).path;
  const filterPath = stages.length === level - 1 ? stages.map((stage) => stage.mz) : null;
  const candidates = lastStage(header.precursors, level, levelOf).filter((record) => isolatedMz(record) !== null);
  // A record of the last stage may refer to a scan of a wrong stage; it must not stand for that stage as well.
  const others = header.precursors.filter((record) => !candidates.includes(record));
  const hint = filterPath?.at(-1) ?? null;
  const record = (hint === null ? null : nearest(candidates, hint)) ?? candidates[0] ?? null;
  const target = record ? isolatedMz(record) : hint;
  if (target === null || target <= 0) return null;
  const notches = Math.max(1, new Set(candidates.map(isolatedMz)).size);
  const listed = level > 2 ? pathFromList(others, level, target, levelOf) : null;
  if (listed) return { record, target, notches, path: listed, pathFrom: 'precursor-list' };
  if (filterPath)
    return { record, target, notches, path: [...filterPath.slice(0, -1), target], pathFrom: 'filter-string' };
  return { record, target, notches, path: level === 2 ? [target] : null, pathFrom: null };
}
