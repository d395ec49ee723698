import { and, eq } from 'drizzle-orm';
import type { Database, Executor } from '../db/connection';
import { jobs } from '../db/schema';
import type { FileStore } from '../storage';
import { isDatabaseAway, persist } from './database-away';
import type { JobKind } from './queue';

/** A job as the process holds it that claimed it. Plain data: it goes to the worker thread as it is. */
export interface ClaimedJob {
  id: string;
  kind: JobKind;
  groupId: string | null;
  studyId: string | null;
  subjectId: string;
  input: unknown;
  createdBy: string | null;
  /** the claiming process and the count of its attempts: together they tell this claim from any later one. */
  owner: string;
  attempt: number;
}

export interface JobProgress {
  done: number;
  /** 0: not known. */
  total: number;
  what: string;
}

/** Why a job did not end well, in words for a person. */
export interface JobFailure {
  code: string;
  message: string;
  cure: string | null;
  /** whether the same work may succeed at another time. */
  again: boolean;
}

export type JobOutcome =
  | { kind: 'done'; result: unknown }
  | { kind: 'failed'; failure: JobFailure }
  | { kind: 'cancelled' }
  | { kind: 'lost' };

/** What a job's work is given. */
export interface JobContext {
  db: Database;
  store: FileStore;
  job: ClaimedJob;
  report(progress: JobProgress): void;
  isCancelled(): boolean;
  /** A transaction that only commits while this claim of the job still stands; done again while the database is away. */
  transact<T>(work: (tx: Executor) => Promise<T>): Promise<T>;
}

/** The work ended because a person asked for it, or because the process stops. */
export class JobCancelled extends Error {}

/** Another process took the job over, so this one must not write any more. */
export class JobLost extends Error {}

/** Locks the row of the job for this transaction. @throws JobLost when the claim no longer stands */
export async function fence(tx: Executor, job: ClaimedJob): Promise<void> {
  const [row] = await tx
    .select({ id: jobs.id })
    .from(jobs)
    .where(
      and(eq(jobs.id, job.id), eq(jobs.owner, job.owner), eq(jobs.attempts, job.attempt), eq(jobs.state, 'running'))
    )
    .for('update');
  if (!row) throw new JobLost();
}

const PATIENCE = 60_000;

/** Builds the context of one claimed job. */
export function jobContext(parts: Pick<JobContext, 'db' | 'store' | 'job' | 'report' | 'isCancelled'>): JobContext {
  const { db, job, isCancelled } = parts;
  return {
    ...parts,
    transact: (work) =>
      persist(
        () =>
          db.transaction(
            async (tx) => {
              await fence(tx, job);
              return work(tx);
            },
            { isolationLevel: 'read committed' }
          ),
        { patience: PATIENCE, stopped: isCancelled }
      )
  };
}

/** Ends the work when that was asked. @throws JobCancelled */
export function goOn(context: Pick<JobContext, 'isCancelled'>): void {
  if (context.isCancelled()) throw new JobCancelled();
}

/** A failure that the program did not foresee: the person learns that it can be tried again, the log learns the rest. */
export function unforeseen(error: unknown): JobFailure {
  if (isDatabaseAway(error))
    return {
      code: 'database-away',
      message: 'The database did not answer while this was under way.',
      cure: 'It is tried again by itself; nothing was half-written.',
      again: true
    };
  return {
    code: 'unforeseen',
    message: 'Something went wrong on our side while this was under way.',
    cure: 'Try again; if it stays, tell your operator.',
    again: true
  };
}
