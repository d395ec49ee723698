import { and, eq, getTableColumns, sql, type SQL } from 'drizzle-orm';
import type { Readable } from 'node:stream';
import { CoreError } from '$lib/core/errors';
import { readMzml, type ReadOptions, type RunSummary } from '$lib/core/mzml';
import type { RunInfo, RunWarning, Scan, ScanHeader } from '$lib/core/model';
import { nodeReading } from '$lib/node/reading';
import { sizeText } from '$lib/schema/upload';
import { packPeaks } from '../db/packing';
import { runPrecursors, runs, scans } from '../db/schema';
import { goOn, type JobContext } from '../jobs/job';
import { clearReading } from '../jobs/settle';
import { PeakMemory, precursorRows } from './run-precursors';

type RunRow = typeof runs.$inferSelect;
type ScanRow = typeof scans.$inferInsert;

/** One insert takes at most so many scans and so many bytes of packed peaks. */
const BATCH_ROWS = 200;
const BATCH_BYTES = 4 << 20;

function scanRow(runId: string, scan: Scan): ScanRow {
  const { peaks, ...header } = scan;
  return {
    runId,
    index: scan.index,
    nativeId: scan.id.slice(0, 500),
    level: scan.level,
    polarity: scan.polarity,
    time: scan.time,
    totalIonCurrent: scan.totalIonCurrent,
    basePeakMz: scan.basePeakMz,
    basePeakIntensity: scan.basePeakIntensity,
    centroided: scan.centroided,
    peakCount: peaks.mz.length,
    header,
    peaks: packPeaks(peaks)
  };
}

const columns = getTableColumns(scans);
const fields = Object.keys(columns) as (keyof typeof columns & keyof ScanRow)[];
const names = sql.join(
  fields.map((field) => sql.identifier(columns[field].name)),
  sql`, `
);

/**
 * Inserts rows as one parameter, a list of lists that the driver writes out: with a parameter for each of the thousands of
 * cells, building the statement takes longer than reading the scans.
 */
function insertion(rows: readonly ScanRow[]): SQL {
  const cells = rows.map((row) =>
    fields.map((field) => (row[field] === undefined ? null : columns[field].mapToDriverValue(row[field])))
  );
  return sql`insert ignore into ${scans} (${names}) values ${sql.param(cells)}`;
}

/**
 * Collects rows and writes them in batches, each in a transaction of its own that the job's claim guards. The next batch is
 * read while the database takes the last one.
 */
class ScanWriter {
  private rows: ScanRow[] = [];
  private bytes = 0;
  private writing: Promise<unknown> = Promise.resolve();

  constructor(private readonly context: JobContext) {}

  async add(row: ScanRow): Promise<void> {
    this.rows.push(row);
    this.bytes += row.peaks.length;
    if (this.rows.length >= BATCH_ROWS || this.bytes >= BATCH_BYTES) await this.next();
  }

  /** Ends when everything is written. @throws what a batch met, at the latest here */
  async flush(): Promise<void> {
    await this.next();
    await this.writing;
  }

  /** Ends when nothing is under way any more, whatever became of it. */
  async stop(): Promise<void> {
    await Promise.allSettled([this.writing]);
  }

  private async next(): Promise<void> {
    const rows = this.rows;
    this.rows = [];
    this.bytes = 0;
    await this.writing;
    if (!rows.length) return;
    // A commit whose answer was lost is done again: the same row twice is then no error.
    this.writing = this.context.transact((tx) => tx.execute(insertion(rows)));
    // Whoever waits for it next learns of a failure; until then it is no unhandled one.
    this.writing.catch(() => undefined);
  }
}

const NO_MSN: RunWarning = {
  code: 'no-msn',
  message:
    'The file holds no MSn scans, so no tree can be built from it. Export the run again with its MS2 and deeper scans, or upload the run in which the precursor ion was fragmented',
  scans: [],
  count: 1
};

const infoOf = (summary: RunSummary): RunInfo => ({ ...summary.info, checksum: summary.checksum });

async function finish(
  context: JobContext,
  run: RunRow,
  headers: ScanHeader[],
  memory: PeakMemory,
  summary: RunSummary
) {
  context.report({ done: run.bytes, total: run.bytes, what: `Finding the precursor ions of ${headers.length} scans` });
  const precursors = precursorRows(run.id, headers, memory);
  const warnings = headers.some((header) => header.level > 1) ? summary.warnings : [...summary.warnings, NO_MSN];
  goOn(context);
  await context.transact(async (tx) => {
    await tx.delete(runPrecursors).where(eq(runPrecursors.runId, run.id));
    for (let i = 0; i < precursors.length; i += 500)
      await tx.insert(runPrecursors).values(precursors.slice(i, i + 500));
    await tx
      .update(runs)
      .set({ state: 'ready', info: infoOf(summary), warnings, error: null, readAt: new Date() })
      .where(eq(runs.id, run.id));
  });
  return { scans: headers.length, precursors: precursors.length };
}

async function* watched(source: Readable): AsyncGenerator<Uint8Array> {
  yield* source;
}

/**
 * Work of a 'read-run' job: streams the stored file through the reader into rows of scans, finds its precursor ions, and
 * only then calls the run ready. A repetition first removes what an earlier attempt wrote.
 * @throws CoreError for a file that cannot be used, JobCancelled, JobLost, MissingFile
 */
export async function readRunJob(context: JobContext) {
  const { job, store } = context;
  const run = await context.transact(async (tx) => {
    const [row] = await tx.select().from(runs).where(eq(runs.id, job.subjectId)).for('update');
    if (!row || row.state === 'ready') return null;
    await clearReading(tx, row.id);
    await tx
      .update(runs)
      .set({ state: 'reading', error: null })
      .where(and(eq(runs.id, row.id)));
    return row;
  });
  if (!run) return null;
  const headers: ScanHeader[] = [];
  const memory = new PeakMemory();
  const writer = new ScanWriter(context);
  const onProgress = (bytes: number, count: number) =>
    context.report({
      done: bytes,
      total: run.bytes,
      what: `Reading: ${sizeText(bytes)} of ${sizeText(run.bytes)}, ${count} scans`
    });
  const options: ReadOptions = { ...nodeReading, onProgress, isCancelled: context.isCancelled };
  try {
    for await (const event of readMzml(watched(await store.open(run.storageKey)), options)) {
      if (event.kind === 'scan') {
        const { peaks, ...header } = event.scan;
        memory.keep(headers.length, header.level, peaks);
        headers.push(header);
        await writer.add(scanRow(run.id, event.scan));
      } else if (event.kind === 'end') {
        await writer.flush();
        return await finish(context, run, headers, memory, event.summary);
      }
    }
  } finally {
    await writer.stop();
  }
  throw new CoreError('truncated', 'The reader ended without a summary');
}
