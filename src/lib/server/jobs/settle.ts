import { and, eq } from 'drizzle-orm';
import type { Database, Executor } from '../db/connection';
import { jobs, runPrecursors, runs, scans } from '../db/schema';
import { fence, JobLost, type ClaimedJob, type JobFailure, type JobOutcome } from './job';
import { databaseNow, dueIn, silentJobs } from './queue';

type JobRow = Pick<typeof jobs.$inferSelect, 'id' | 'kind' | 'subjectId' | 'attempts' | 'maxAttempts' | 'cancelAsked'>;

const CANCELLED: JobFailure = {
  code: 'cancelled',
  message: 'It was cancelled before it was complete.',
  cure: 'Start it again when you want it.',
  again: false
};
const INTERRUPTED: JobFailure = {
  code: 'interrupted',
  message: 'The program was interrupted each time while it worked on this.',
  cure: 'Try again; if it stays, the file may be too large for the memory of the server.',
  again: true
};

/** Removes what an unfinished reading wrote, so that no half run is ever seen. */
export async function clearReading(tx: Executor, runId: string): Promise<void> {
  await tx.delete(scans).where(eq(scans.runId, runId));
  await tx.delete(runPrecursors).where(eq(runPrecursors.runId, runId));
}

/** Brings the subject of an unfinished job in line with it. */
async function leaveSubject(tx: Executor, job: JobRow, state: 'waiting' | 'failed', failure: JobFailure | null) {
  if (job.kind !== 'read-run') return;
  const [run] = await tx.select({ state: runs.state }).from(runs).where(eq(runs.id, job.subjectId)).for('update');
  if (!run || run.state === 'ready') return;
  await clearReading(tx, job.subjectId);
  const error = failure && { code: failure.code, message: failure.message, cure: failure.cure };
  await tx.update(runs).set({ state, error }).where(eq(runs.id, job.subjectId));
}

async function end(tx: Executor, job: JobRow, state: 'failed' | 'cancelled', failure: JobFailure): Promise<void> {
  const { code, message, cure } = failure;
  await tx
    .update(jobs)
    .set({ state, error: { code, message, cure }, owner: null, settledAt: databaseNow })
    .where(eq(jobs.id, job.id));
  await leaveSubject(tx, job, 'failed', failure);
}

/** Puts a job back into the queue. @param refund true: the attempt does not count */
async function putBack(tx: Executor, job: JobRow, refund: boolean): Promise<void> {
  const attempts = refund ? Math.max(0, job.attempts - 1) : job.attempts;
  const first = job.kind === 'mail' ? 20_000 : 1000;
  const pause = refund ? 0 : first * 2 ** Math.min(5, attempts - 1);
  await tx
    .update(jobs)
    .set({ state: 'queued', attempts, owner: null, heartbeatAt: null, notBefore: dueIn(pause) })
    .where(eq(jobs.id, job.id));
  await leaveSubject(tx, job, 'waiting', null);
}

async function apply(tx: Executor, job: JobRow, outcome: JobOutcome): Promise<void> {
  if (outcome.kind === 'done') {
    const { result } = outcome;
    await tx
      .update(jobs)
      .set({ state: 'done', result: result ?? null, error: null, owner: null, settledAt: databaseNow })
      .where(eq(jobs.id, job.id));
  } else if (job.cancelAsked) await end(tx, job, 'cancelled', CANCELLED);
  else if (outcome.kind === 'cancelled') await putBack(tx, job, true);
  else if (outcome.kind === 'failed' && outcome.failure.again && job.attempts < job.maxAttempts)
    await putBack(tx, job, false);
  else if (outcome.kind === 'failed') await end(tx, job, 'failed', outcome.failure);
}

/**
 * Writes how a job ended, and what that means for its subject, in one transaction. A cancelled job that nobody asked to
 * cancel was stopped with the process: it goes back to the queue. A claim that no longer stands changes nothing.
 */
export async function settle(db: Database, claimed: ClaimedJob, outcome: JobOutcome): Promise<void> {
  if (outcome.kind === 'lost') return;
  try {
    await db.transaction(
      async (tx) => {
        await fence(tx, claimed);
        const [job] = await tx.select().from(jobs).where(eq(jobs.id, claimed.id));
        await apply(tx, job, outcome);
      },
      { isolationLevel: 'read committed' }
    );
  } catch (error) {
    if (!(error instanceof JobLost)) throw error;
  }
}

/** Cancels a job that nobody works on yet. @returns false when it is no longer queued */
export async function cancelQueued(tx: Executor, jobId: string): Promise<boolean> {
  const [job] = await tx
    .select()
    .from(jobs)
    .where(and(eq(jobs.id, jobId), eq(jobs.state, 'queued')))
    .for('update');
  if (job) await end(tx, job, 'cancelled', CANCELLED);
  return Boolean(job);
}

/**
 * Puts jobs of dead processes back, or fails them when they were interrupted too often.
 * @param own jobs that the caller is at work on itself
 * @returns how many there were
 */
export function reap(
  db: Database,
  silence: number,
  isDead: (owner: string) => boolean,
  own: ReadonlySet<string> = new Set()
): Promise<number> {
  return db.transaction(
    async (tx) => {
      const dead = await silentJobs(tx, silence, isDead, own);
      for (const job of dead) {
        if (job.cancelAsked) await end(tx, job, 'cancelled', CANCELLED);
        else if (job.attempts < job.maxAttempts) await putBack(tx, job, false);
        else await end(tx, job, 'failed', INTERRUPTED);
      }
      return dead.length;
    },
    { isolationLevel: 'read committed' }
  );
}
