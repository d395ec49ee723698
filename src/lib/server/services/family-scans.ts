import { and, asc, eq, inArray } from 'drizzle-orm';
import type { PeakList, Scan, ScanHeader } from '$lib/core/model';
import type { Executor } from '../db/connection';
import { unpackPeaks } from '../db/packing';
import { scans } from '../db/schema';

/** Survey scans taken for one precursor ion, those beside its strongest MSn scans first. */
const MAX_SURVEY = 60;
/** What is kept of a survey scan around the precursor ion, m/z. */
const BELOW = 3;
const BEYOND = 10;

export type SurveyIndex = { index: number; nativeId: string; polarity: 'positive' | 'negative' | null }[];

/** The MS1 scans of a run without their peaks, in the order of the file. */
export const surveyIndex = (tx: Executor, runId: string): Promise<SurveyIndex> =>
  tx
    .select({ index: scans.index, nativeId: scans.nativeId, polarity: scans.polarity })
    .from(scans)
    .where(and(eq(scans.runId, runId), eq(scans.level, 1)))
    .orderBy(asc(scans.index));

function around({ mz, intensity }: PeakList, centre: number): PeakList {
  const from = mz.findIndex((value) => value >= centre - BELOW);
  if (from < 0) return { mz: new Float64Array(), intensity: new Float64Array() };
  const beyond = mz.findIndex((value) => value > centre + BEYOND);
  const to = beyond < 0 ? mz.length : beyond;
  return { mz: mz.slice(from, to), intensity: intensity.slice(from, to) };
}

/** Indexes of the survey scans that belong to MSn scans: the one referred to, else the nearest before, else after. */
function surveysOf(headers: ScanHeader[], survey: SurveyIndex): number[] {
  const byId = new Map(survey.map((scan) => [scan.nativeId, scan.index]));
  const chosen = new Set<number>();
  const strongest = [...headers].sort((a, b) => b.totalIonCurrent - a.totalIonCurrent || a.index - b.index);
  for (const header of strongest) {
    if (chosen.size >= MAX_SURVEY) break;
    const fits = survey.filter((scan) => scan.polarity === header.polarity);
    const referred = header.precursors.map((record) => byId.get(record.spectrumRef ?? '')).find((i) => i !== undefined);
    const nearest =
      fits.findLast((scan) => scan.index < header.index) ?? fits.find((scan) => scan.index > header.index);
    const index = referred ?? nearest?.index;
    if (index !== undefined) chosen.add(index);
  }
  return [...chosen];
}

async function load(tx: Executor, runId: string, indexes: number[]): Promise<Scan[]> {
  const found: Scan[] = [];
  for (let i = 0; i < indexes.length; i += 200) {
    const rows = await tx
      .select({ header: scans.header, peaks: scans.peaks })
      .from(scans)
      .where(and(eq(scans.runId, runId), inArray(scans.index, indexes.slice(i, i + 200))));
    // The column holds what readRunJob wrote: a ScanHeader.
    for (const row of rows) found.push({ ...(row.header as ScanHeader), peaks: unpackPeaks(row.peaks) });
  }
  return found;
}

/**
 * All scans that one precursor ion needs, in the order of the file: its MSn scans, and its survey scans cut to the
 * neighbourhood of the ion.
 * @param mz m/z of the precursor ion
 */
export async function familyScans(
  tx: Executor,
  runId: string,
  mz: number,
  scanIndexes: number[],
  survey: SurveyIndex
): Promise<Scan[]> {
  const own = await load(tx, runId, scanIndexes);
  const beside = await load(tx, runId, surveysOf(own, survey));
  const cut = beside.map((scan) => ({ ...scan, peaks: around(scan.peaks, mz) }));
  return [...own, ...cut].sort((a, b) => a.index - b.index);
}
