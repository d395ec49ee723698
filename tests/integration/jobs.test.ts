import { eq } from 'drizzle-orm';
import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import type { Actor } from '$lib/server/auth/authorize';
import { database } from '$lib/server/db';
import { connect } from '$lib/server/db/connection';
import { jobs, runs, scans } from '$lib/server/db/schema';
import { JobRunner, type RunnerOptions } from '$lib/server/jobs/job-runner';
import type { ClaimedJob, JobOutcome } from '$lib/server/jobs/job';
import { claim, enqueue } from '$lib/server/jobs/queue';
import { reap } from '$lib/server/jobs/settle';
import { JobThreads } from '$lib/server/jobs/threads';
import { cancelJob, jobsForDesk, readJob, retryJob } from '$lib/server/services/jobs';
import { openGate } from '../helpers/gate';
import { addPerson, addRun, addStudy, openStage, smallRun, until, type Stage } from './support/stage';

let stage: Stage;
let annotator: Actor;
let reviewer: Actor;
let stranger: Actor;
let place: { groupId: string; studyId: string };

beforeAll(async () => {
  stage = await openStage();
  const db = database();
  [annotator, reviewer, stranger] = [
    await addPerson(db, 'annotator'),
    await addPerson(db, 'reviewer'),
    await addPerson(db, 'stranger')
  ];
  place = await addStudy(db, [
    [annotator, 'annotator'],
    [reviewer, 'reviewer']
  ]);
  await addStudy(db, [[stranger, 'lead']]);
});
afterAll(() => stage.close());

const jobOf = async (id: string) => (await database().select().from(jobs).where(eq(jobs.id, id)))[0];
const runOf = async (id: string) => (await database().select().from(runs).where(eq(runs.id, id)))[0];
const state = (id: string, wanted: string, patience?: number) =>
  until(async () => ((await jobOf(id)).state === wanted ? jobOf(id) : null), patience);
const mail = async (): Promise<JobOutcome> => ({ kind: 'done', result: null });

/** Threads that do as the test says instead of working. */
function puppets(act: (job: ClaimedJob, flag: Int32Array) => Promise<JobOutcome>): RunnerOptions['threads'] {
  return {
    run: (job, flag) => act(job, new Int32Array(flag)),
    kill: async () => undefined,
    close: async () => undefined
  };
}

const opened: JobRunner[] = [];
const newRunner = (options: Partial<RunnerOptions> = {}, db = database()) => {
  const runner = new JobRunner(db, { workers: 2, heartbeat: 100, mail, threads: new JobThreads(), ...options });
  opened.push(runner);
  return runner;
};
afterEach(async () => {
  await Promise.all(opened.splice(0).map((runner) => runner.stop()));
  await database().delete(jobs);
});

const newJob = (kind: 'suggest' | 'mail' = 'suggest') =>
  enqueue(database(), { ...place, kind, subjectId: crypto.randomUUID(), input: {}, createdBy: null, what: 'Waiting' });

describe('the queue', () => {
  it('gives each job to one process only', async () => {
    await Promise.all(Array.from({ length: 12 }, () => newJob()));
    const taken = await Promise.all(Array.from({ length: 16 }, (_, i) => claim(database(), `p:${i}:x`, ['suggest'])));
    const claimed = taken.flatMap((job) => job?.id ?? []);
    expect(new Set(claimed).size).toBe(claimed.length);
    expect(claimed.length).toBeGreaterThan(0);
  });

  it('tries an unforeseen failure again and fails with words after the last attempt', async () => {
    const id = await newJob();
    let attempts = 0;
    const failure = { code: 'unforeseen', message: 'It broke.', cure: 'Try again.', again: true };
    const runner = newRunner({ threads: puppets(async () => (attempts++, { kind: 'failed', failure })) });
    runner.start();
    const job = await state(id, 'failed');
    await runner.stop();
    expect(attempts).toBe(3);
    expect(job.error).toEqual({ code: 'unforeseen', message: 'It broke.', cure: 'Try again.' });
  });

  it('puts running jobs back when the process stops, without counting the attempt', async () => {
    const id = await newJob();
    const threads = puppets(async (_job, flag) => {
      await until(async () => Atomics.load(flag, 0) === 1);
      return { kind: 'cancelled' };
    });
    const runner = newRunner({ threads });
    runner.start();
    await state(id, 'running');
    await runner.stop();
    expect(await jobOf(id)).toMatchObject({ state: 'queued', attempts: 0, owner: null });
  });

  it('keeps the heart of a long job beating, so that no other process takes it', async () => {
    const id = await newJob();
    let runs = 0;
    const act = async (): Promise<JobOutcome> => {
      runs++;
      await new Promise((resolve) => setTimeout(resolve, 2000));
      return { kind: 'done', result: null };
    };
    const [first, second] = [newRunner({ threads: puppets(act) }), newRunner({ threads: puppets(act) })];
    first.start();
    second.start();
    await state(id, 'done');
    await Promise.all([first.stop(), second.stop()]);
    expect(runs).toBe(1);
  });

  it('takes the jobs of a silent process of another machine after five beats, and gives up after three attempts', async () => {
    const { runId, jobId } = await addRun(database(), place, smallRun(1));
    for (let attempt = 1; attempt <= 3; attempt++) {
      await database().update(jobs).set({ notBefore: null }).where(eq(jobs.id, jobId));
      const job = await claim(database(), 'elsewhere:77:abc', ['read-run']);
      expect(job?.attempt).toBe(attempt);
      expect(await reap(database(), 500, () => false)).toBe(0);
      await new Promise((resolve) => setTimeout(resolve, 600));
      expect(await reap(database(), 500, () => false, new Set([jobId]))).toBe(0);
      expect(await reap(database(), 500, () => false)).toBe(1);
    }
    expect(await jobOf(jobId)).toMatchObject({ state: 'failed', error: { code: 'interrupted' } });
    expect(await runOf(runId)).toMatchObject({ state: 'failed', error: { code: 'interrupted' } });
  });
});

describe('people and jobs', () => {
  it('lets members of the group see a job, and those who may upload cancel and retry it', async () => {
    const { runId, jobId } = await addRun(database(), place, smallRun(1));
    expect(await readJob(reviewer, jobId)).toMatchObject({ state: 'queued' });
    await expect(readJob(stranger, jobId)).rejects.toMatchObject({ code: 'not-found' });
    await expect(readJob(null, jobId)).rejects.toMatchObject({ code: 'unauthenticated' });
    await expect(cancelJob(reviewer, jobId)).rejects.toMatchObject({ code: 'forbidden' });
    await expect(cancelJob(stranger, jobId)).rejects.toMatchObject({ code: 'not-found' });
    await cancelJob(annotator, jobId);
    expect(await runOf(runId)).toMatchObject({ state: 'failed', error: { code: 'cancelled' } });
    await expect(cancelJob(annotator, jobId)).rejects.toMatchObject({ code: 'conflict' });
    await expect(retryJob(stranger, jobId)).rejects.toMatchObject({ code: 'not-found' });
    await retryJob(annotator, jobId);
    expect(await runOf(runId)).toMatchObject({ state: 'waiting', error: null });
    const desk = await jobsForDesk(reviewer);
    expect(desk.find((job) => job.id === jobId)).toMatchObject({ subject: 'run.mzML', canManage: false });
    expect(await jobsForDesk(stranger)).toEqual([]);
    await cancelJob(annotator, jobId);
  });

  it('never shows the input of a job', async () => {
    const id = await newJob();
    expect(Object.keys(await readJob(annotator, id))).not.toContain('input');
  });
});

describe('worker threads', () => {
  it('read a run with progress while the main thread stays free', async () => {
    const { runId, jobId } = await addRun(database(), place, smallRun(8000));
    const runner = newRunner();
    runner.start();
    const seen = await until(async () => {
      const { progress, state: now } = await jobOf(jobId);
      return now === 'running' && progress.done > 0 ? progress : null;
    });
    expect(seen.what).toMatch(/MB|bytes/);
    await state(jobId, 'done', 60_000);
    await runner.stop();
    expect((await runOf(runId)).state).toBe('ready');
    expect(await database().$count(scans, eq(scans.runId, runId))).toBe(24_000);
  });

  it('stop at once when the job is cancelled, and leave no scans', async () => {
    const { runId, jobId } = await addRun(database(), place, smallRun(3000));
    const runner = newRunner();
    runner.start();
    await until(async () => (await database().$count(scans, eq(scans.runId, runId))) > 0);
    await cancelJob(annotator, jobId);
    await state(jobId, 'cancelled', 10_000);
    await runner.stop();
    expect(await database().$count(scans, eq(scans.runId, runId))).toBe(0);
    expect(await runOf(runId)).toMatchObject({ state: 'failed', error: { code: 'cancelled' } });
  });

  it('are replaced when one dies in the middle of a job', async () => {
    const { runId, jobId } = await addRun(database(), place, smallRun(2000));
    const threads = new JobThreads();
    const runner = newRunner({ threads });
    runner.start();
    await until(async () => (await database().$count(scans, eq(scans.runId, runId))) > 0);
    await threads.kill(jobId);
    await state(jobId, 'done', 60_000);
    await runner.stop();
    expect((await jobOf(jobId)).attempts).toBe(2);
    expect(await database().$count(scans, eq(scans.runId, runId))).toBe(6000);
  });
});

/** Runs the job runner in a process of its own, which can be killed. */
const runnerProcess = (): ChildProcess =>
  spawn(process.execPath, ['--import', 'tsx', 'tests/integration/support/runner-process.ts'], {
    env: process.env,
    stdio: 'inherit'
  });

describe('accidents', () => {
  it('kill -9 of the process in mid-file: the next start reads the run from the beginning', async () => {
    const { runId, jobId } = await addRun(database(), place, smallRun(4000));
    const child = runnerProcess();
    await until(async () => (await database().$count(scans, eq(scans.runId, runId))) > 0, 60_000);
    const ended = once(child, 'exit');
    child.kill('SIGKILL');
    await ended;
    expect((await runOf(runId)).state).toBe('reading');
    const runner = newRunner({ heartbeat: 60_000 });
    runner.start();
    await state(jobId, 'done', 60_000);
    await runner.stop();
    expect((await runOf(runId)).state).toBe('ready');
    expect(await database().$count(scans, eq(scans.runId, runId))).toBe(12_000);
  });

  it('the database away in mid-file: the work waits and goes on, nothing is lost or double', async () => {
    const gate = await openGate(stage.url);
    const { runId, jobId } = await addRun(database(), place, smallRun(4000));
    const through = connect(gate.url);
    const threads = new JobThreads({ ...process.env, DATABASE_URL: gate.url });
    const runner = newRunner({ threads }, through.db);
    runner.start();
    await until(async () => (await database().$count(scans, eq(scans.runId, runId))) > 0, 60_000);
    await gate.shut();
    await new Promise((resolve) => setTimeout(resolve, 4000));
    await gate.open();
    await state(jobId, 'done', 60_000);
    await runner.stop();
    await through.pool.end();
    await gate.shut();
    expect((await jobOf(jobId)).attempts).toBe(1);
    expect(await database().$count(scans, eq(scans.runId, runId))).toBe(12_000);
  });
});
