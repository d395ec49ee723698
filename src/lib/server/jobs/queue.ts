import { randomUUID } from 'node:crypto';
import type { Executor } from '../db/connection';
import { jobs } from '../db/schema';

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

/** Queues a job inside the caller's transaction, so that the work exists exactly when its cause does. @returns its id */
export async function enqueue(tx: Executor, job: NewJob): Promise<string> {
  const id = randomUUID();
  const { what, ...row } = job;
  await tx.insert(jobs).values({ id, ...row, progress: { done: 0, total: 0, what } });
  return id;
}
