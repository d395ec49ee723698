import { and, asc, eq, inArray, isNull, lte, or, sql } from 'drizzle-orm';
import { randomUUID } from 'node:crypto';
import type { Database, Executor } from '../db/connection';
import { jobs } from '../db/schema';
import type { ClaimedJob, JobProgress } from './job';

export type JobKind = (typeof jobs.$inferSelect)['kind'];

export interface NewJob {
  kind: JobKind;
  groupId: string | null;
  studyId: string | null;
  subjectId: string;
  input: Record<string, unknown>;
  createdBy: string | null;
  what: string;
}

/** The database's clock decides all intervals, so that the processes' clocks need not agree. */
const now = sql`UTC_TIMESTAMP(3)`;
const later = (ms: number) => sql`UTC_TIMESTAMP(3) + INTERVAL ${ms * 1000} MICROSECOND`;

/** Queues a job inside the caller's transaction, so that the work exists exactly when its cause does. @returns its id */
export async function enqueue(tx: Executor, job: NewJob): Promise<string> {
  const id = randomUUID();
  const { what, ...row } = job;
  await tx.insert(jobs).values({ id, ...row, progress: { done: 0, total: 0, what } });
  return id;
}

/** Takes the oldest job that is due, each job by one process only. @returns null when there is none */
export function claim(db: Database, owner: string, kinds: JobKind[]): Promise<ClaimedJob | null> {
  return db.transaction(
    async (tx) => {
      const [row] = await tx
        .select()
        .from(jobs)
        .where(
          and(eq(jobs.state, 'queued'), inArray(jobs.kind, kinds), or(isNull(jobs.notBefore), lte(jobs.notBefore, now)))
        )
        .orderBy(asc(jobs.createdAt))
        .limit(1)
        .for('update', { skipLocked: true });
      if (!row) return null;
      const attempt = row.attempts + 1;
      await tx
        .update(jobs)
        .set({ state: 'running', owner, attempts: attempt, heartbeatAt: now, startedAt: now, notBefore: null })
        .where(eq(jobs.id, row.id));
      const { id, kind, groupId, studyId, subjectId, input, createdBy } = row;
      return { id, kind, groupId, studyId, subjectId, input, createdBy, owner, attempt };
    },
    { isolationLevel: 'read committed' }
  );
}

/** Says that these jobs of a process live. A row that its own worker has locked just now is passed over: it lives too. */
export async function beat(db: Database, owner: string, ids: string[]): Promise<void> {
  if (!ids.length) return;
  await db.transaction(
    async (tx) => {
      const mine = await tx
        .select({ id: jobs.id })
        .from(jobs)
        .where(and(inArray(jobs.id, ids), eq(jobs.state, 'running'), eq(jobs.owner, owner)))
        .for('update', { skipLocked: true });
      if (mine.length)
        await tx
          .update(jobs)
          .set({ heartbeatAt: now })
          .where(
            inArray(
              jobs.id,
              mine.map((row) => row.id)
            )
          );
    },
    { isolationLevel: 'read committed' }
  );
}

/** Notes how far a job is; skipped where its worker holds the row, since the next note comes soon. */
export function noteProgress(db: Database, job: ClaimedJob, progress: JobProgress): Promise<void> {
  return db.transaction(
    async (tx) => {
      const [row] = await tx
        .select({ id: jobs.id })
        .from(jobs)
        .where(and(eq(jobs.id, job.id), eq(jobs.owner, job.owner), eq(jobs.attempts, job.attempt)))
        .for('update', { skipLocked: true });
      if (row) await tx.update(jobs).set({ progress }).where(eq(jobs.id, row.id));
    },
    { isolationLevel: 'read committed' }
  );
}

/** Which of a process's running jobs somebody asked to cancel. */
export async function cancelsAsked(db: Database, owner: string): Promise<string[]> {
  const rows = await db
    .select({ id: jobs.id })
    .from(jobs)
    .where(and(eq(jobs.state, 'running'), eq(jobs.owner, owner), eq(jobs.cancelAsked, 1)));
  return rows.map((row) => row.id);
}

/**
 * Running jobs whose process fell silent, or that `isDead` knows to be gone; locked for the caller's transaction.
 * @param own jobs that the caller is at work on: their sign of life may be late, since it passes over a row that their
 *   worker holds
 */
export async function silentJobs(
  tx: Executor,
  silence: number,
  isDead: (owner: string) => boolean,
  own: ReadonlySet<string>
) {
  const rows = await tx
    .select({ job: jobs, silent: sql<number>`${jobs.heartbeatAt} < ${later(-silence)}`.mapWith(Number) })
    .from(jobs)
    .where(eq(jobs.state, 'running'))
    .for('update', { skipLocked: true });
  return rows
    .filter(({ job, silent }) => !own.has(job.id) && (silent || isDead(job.owner ?? '')))
    .map(({ job }) => job);
}

/** When a job that was put back may be taken again. */
export const dueIn = later;
export const databaseNow = now;
