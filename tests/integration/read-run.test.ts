import { asc, eq } from 'drizzle-orm';
import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Actor } from '$lib/server/auth/authorize';
import { database } from '$lib/server/db';
import { unpackPeaks } from '$lib/server/db/packing';
import { jobs, runPrecursors, runs, scans } from '$lib/server/db/schema';
import { jobContext, type JobOutcome } from '$lib/server/jobs/job';
import { perform } from '$lib/server/jobs/perform';
import { claim } from '$lib/server/jobs/queue';
import { settle } from '$lib/server/jobs/settle';
import { fileStore } from '$lib/server/storage';
import { addPerson, addRun, addStudy, IONS, openStage, smallRun, type Stage } from './support/stage';

let stage: Stage;
let annotator: Actor;
let place: { groupId: string; studyId: string };

beforeAll(async () => {
  stage = await openStage();
  annotator = await addPerson(database(), 'annotator');
  place = await addStudy(database(), [[annotator, 'annotator']]);
});
afterAll(() => stage.close());

/** Claims the queued job and does it in this thread. */
async function work(options: { cancelAfter?: number } = {}): Promise<JobOutcome> {
  const job = await claim(database(), `test:1:${Math.random()}`, ['read-run']);
  if (!job) throw new Error('no job is queued');
  let asked = 0;
  const outcome = await perform(
    jobContext({
      db: database(),
      store: fileStore(),
      job,
      report: () => undefined,
      isCancelled: () => options.cancelAfter !== undefined && ++asked > options.cancelAfter
    })
  );
  await settle(database(), job, outcome);
  return outcome;
}

const runOf = async (runId: string) => (await database().select().from(runs).where(eq(runs.id, runId)))[0];
const scansOf = (runId: string) =>
  database().select().from(scans).where(eq(scans.runId, runId)).orderBy(asc(scans.index));

describe('reading a run', () => {
  it.each([
    ['plain', (bytes: Uint8Array) => bytes],
    ['gzipped', (bytes: Uint8Array) => gzipSync(bytes)],
    [
      'gzipped in two members',
      (b: Uint8Array) => Buffer.concat([gzipSync(b.subarray(0, 4000)), gzipSync(b.subarray(4000))])
    ]
  ])('stores every scan and finds the precursor ion of a %s file', async (_name, pack) => {
    const { runId } = await addRun(database(), place, pack(smallRun()));
    expect(await work()).toMatchObject({ kind: 'done', result: { scans: 9, precursors: 1 } });
    const run = await runOf(runId);
    expect(run).toMatchObject({ state: 'ready', error: null });
    expect(run.info).toMatchObject({
      scans: { 1: 3, 2: 3, 3: 3 },
      polarity: 'positive',
      ionSource: 'ESI',
      checksum: 'ok'
    });
    const stored = await scansOf(runId);
    expect(stored.map((scan) => scan.level)).toEqual([1, 2, 3, 1, 2, 3, 1, 2, 3]);
    expect([...unpackPeaks(stored[1].peaks).mz]).toEqual([IONS.second, IONS.first, IONS.precursor]);
    const [precursor] = await database().select().from(runPrecursors).where(eq(runPrecursors.runId, runId));
    expect(precursor).toMatchObject({ mz: IONS.precursor, charge: 1, levels: { 2: 3, 3: 3 } });
    expect(precursor.scanIndexes).toEqual([1, 2, 4, 5, 7, 8]);
  });

  it('keeps the complete scans of a truncated file and says so', async () => {
    const whole = smallRun();
    const text = Buffer.from(whole).toString('latin1');
    const cut = text.indexOf('id="scan=6"') + 40;
    const { runId } = await addRun(database(), place, whole.subarray(0, cut));
    await work();
    const run = await runOf(runId);
    expect(run.state).toBe('ready');
    expect(run.warnings?.map((warning) => warning.code)).toContain('truncated');
    expect(await scansOf(runId)).toHaveLength(5);
  });

  it('keeps the complete scans of a truncated gzip file', async () => {
    const packed = gzipSync(smallRun(60));
    const { runId } = await addRun(database(), place, packed.subarray(0, Math.floor(packed.length * 0.6)));
    await work();
    const run = await runOf(runId);
    expect(run.state).toBe('ready');
    expect(run.warnings?.map((warning) => warning.code)).toContain('truncated');
    expect((await scansOf(runId)).length).toBeGreaterThan(10);
  });

  it('says where a file with a DTD was refused, and leaves no scan', async () => {
    const text = Buffer.from(smallRun())
      .toString()
      .replace('<indexedmzML', '<!DOCTYPE x [<!ENTITY y "z">]><indexedmzML');
    const { runId, jobId } = await addRun(database(), place, Buffer.from(text));
    await work();
    const run = await runOf(runId);
    expect(run.state).toBe('failed');
    expect(run.error?.code).toBe('doctype');
    expect(run.error?.message).not.toMatch(/ at .*\.ts/);
    expect(await scansOf(runId)).toHaveLength(0);
    const [job] = await database().select().from(jobs).where(eq(jobs.id, jobId));
    expect(job).toMatchObject({ state: 'failed', attempts: 1 });
  });

  it('calls a file without MSn ready and says what to do', async () => {
    const text = Buffer.from(smallRun(1)).toString();
    const head = text.slice(0, text.indexOf('<spectrum '));
    const first = text.slice(text.indexOf('<spectrum '), text.indexOf('</spectrum>') + 11);
    const only = `${head}${first}</spectrumList></run></mzML></indexedmzML>`;
    const { runId } = await addRun(database(), place, Buffer.from(only));
    await work();
    const run = await runOf(runId);
    expect(run.state).toBe('ready');
    expect(run.warnings?.find((warning) => warning.code === 'no-msn')?.message).toMatch(/upload the run/);
  });

  it('leaves no half run when it is stopped, and reads the whole at the next attempt', async () => {
    const { runId } = await addRun(database(), place, smallRun(500));
    expect((await work({ cancelAfter: 3 })).kind).toBe('cancelled');
    expect((await runOf(runId)).state).toBe('waiting');
    expect(await scansOf(runId)).toHaveLength(0);
    expect((await work()).kind).toBe('done');
    expect(await scansOf(runId)).toHaveLength(1500);
    const list = await database().select().from(runPrecursors).where(eq(runPrecursors.runId, runId));
    expect(list).toHaveLength(1);
  });

  it('replaces what a dead attempt left behind', async () => {
    const { runId, jobId } = await addRun(database(), place, smallRun());
    await work();
    await database().update(runs).set({ state: 'reading' }).where(eq(runs.id, runId));
    await database().update(jobs).set({ state: 'queued', owner: null }).where(eq(jobs.id, jobId));
    expect((await work()).kind).toBe('done');
    expect(await scansOf(runId)).toHaveLength(9);
  });

  it('stops writing when another process has taken the job over', async () => {
    const { runId, jobId } = await addRun(database(), place, smallRun());
    const job = await claim(database(), 'first:1:a', ['read-run']);
    await database().update(jobs).set({ owner: 'second:1:b', attempts: 2 }).where(eq(jobs.id, jobId));
    const outcome = await perform(
      jobContext({ db: database(), store: fileStore(), job: job!, report: () => undefined, isCancelled: () => false })
    );
    expect(outcome.kind).toBe('lost');
    await settle(database(), job!, outcome);
    expect(await scansOf(runId)).toHaveLength(0);
    const [row] = await database().select().from(jobs).where(eq(jobs.id, jobId));
    expect(row).toMatchObject({ state: 'running', owner: 'second:1:b' });
    await database().delete(jobs).where(eq(jobs.id, jobId));
  });

  it('says that a file is missing from the store', async () => {
    const { runId } = await addRun(database(), place, smallRun());
    await fileStore().delete((await runOf(runId)).storageKey);
    await work();
    expect((await runOf(runId)).error).toMatchObject({ code: 'gone' });
  });
});
