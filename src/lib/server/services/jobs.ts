import { and, desc, eq, gt, inArray, ne, or, sql } from 'drizzle-orm';
import { may, type Action } from '$lib/review/permissions';
import type { JobView } from '$lib/schema/run';
import { requireGroup, requireStudy, type Actor } from '../auth/authorize';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { groups, jobs, memberships, runs, studies, studyGuests, trees } from '../db/schema';
import { ServiceError } from '../errors';
import type { JobKind } from '../jobs/queue';
import { cancelQueued } from '../jobs/settle';

type JobRow = typeof jobs.$inferSelect;

/** What a person must be allowed to do in order to cancel a job or try it again. */
const NEEDED: Record<JobKind, Action> = {
  'read-run': 'run.upload',
  'build-trees': 'tree.build',
  suggest: 'tree.edit',
  mail: 'member.manage'
};

/** A job without its input, which can hold what is not for everybody. */
export const jobView = (job: JobRow): JobView => ({
  id: job.id,
  kind: job.kind,
  state: job.state,
  subjectId: job.subjectId,
  studyId: job.studyId,
  progress: job.progress,
  error: job.error,
  result: job.result,
  cancelAsked: job.cancelAsked === 1,
  createdAt: job.createdAt
});

const nowhere = () =>
  new ServiceError('not-found', 'There is no such job, or it is not open to you.', 'Reload the page.');

async function accessJob(actor: Actor | null, jobId: string, action: Action | null): Promise<JobRow> {
  if (!actor) throw new ServiceError('unauthenticated', 'You are not signed in.', 'Sign in and try again.');
  const [job] = await database().select().from(jobs).where(eq(jobs.id, jobId));
  if (!job) throw nowhere();
  try {
    const needed = action === null ? NEEDED[job.kind] : action;
    if (job.studyId) await requireStudy(actor, job.studyId, needed);
    else if (job.groupId) await requireGroup(actor, job.groupId, NEEDED[job.kind]);
    else throw nowhere();
  } catch (error) {
    if (error instanceof ServiceError && error.code === 'not-found') throw nowhere();
    throw error;
  }
  return job;
}

/** State of a job for a person who may read its study. @throws ServiceError */
export async function readJob(actor: Actor | null, jobId: string): Promise<JobView> {
  return jobView(await accessJob(actor, jobId, 'study.read'));
}

/** Cancels a job: at once while it waits, else as soon as its worker hears of it. @throws ServiceError conflict when it has ended */
export async function cancelJob(actor: Actor | null, jobId: string): Promise<void> {
  await accessJob(actor, jobId, null);
  await database().transaction(
    async (tx) => {
      await tx.update(jobs).set({ cancelAsked: 1 }).where(eq(jobs.id, jobId));
      if (await cancelQueued(tx, jobId)) return;
      const [job] = await tx.select({ state: jobs.state }).from(jobs).where(eq(jobs.id, jobId));
      if (job?.state !== 'running')
        throw new ServiceError('conflict', 'This job has ended already.', 'Reload the page to see how.');
    },
    { isolationLevel: 'read committed' }
  );
}

/** Queues a failed or cancelled job again, with all its attempts. @throws ServiceError conflict when it is not in such a state */
export async function retryJob(actor: Actor | null, jobId: string): Promise<void> {
  await accessJob(actor, jobId, null);
  await database().transaction(async (tx) => {
    const [job] = await tx.select().from(jobs).where(eq(jobs.id, jobId)).for('update');
    if (!job || !['failed', 'cancelled'].includes(job.state))
      throw new ServiceError('conflict', 'This job is not one that failed or was cancelled.', 'Reload the page.');
    await tx
      .update(jobs)
      .set({
        state: 'queued',
        attempts: 0,
        cancelAsked: 0,
        error: null,
        notBefore: null,
        settledAt: null,
        progress: { done: 0, total: 0, what: 'Waiting' }
      })
      .where(eq(jobs.id, jobId));
    if (job.kind === 'read-run')
      await tx
        .update(runs)
        .set({ state: 'waiting', error: null })
        .where(and(eq(runs.id, job.subjectId), ne(runs.state, 'ready')));
  });
}

/** The newest job of each subject among some kinds. */
export async function latestJobs(tx: Executor, subjectIds: string[], kinds: JobKind[]): Promise<Map<string, JobView>> {
  const found = new Map<string, JobView>();
  if (!subjectIds.length) return found;
  const rows = await tx
    .select()
    .from(jobs)
    .where(and(inArray(jobs.subjectId, subjectIds), inArray(jobs.kind, kinds)))
    .orderBy(desc(jobs.createdAt));
  for (const row of rows) if (!found.has(row.subjectId)) found.set(row.subjectId, jobView(row));
  return found;
}

/** A job on the desk, with the name and page of what it is about. */
export interface DeskJob extends JobView {
  subject: string;
  href: string;
  study: string;
  /** whether the person may cancel it or try it again. */
  canManage: boolean;
}

/** Waiting, running and (in the last fortnight) failed jobs of the studies that a person can read, newest first. */
export async function jobsForDesk(actor: Actor, limit = 30): Promise<DeskJob[]> {
  const db = database();
  const opened = db.select({ id: studyGuests.studyId }).from(studyGuests).where(eq(studyGuests.userId, actor.id));
  const rows = await db
    .select({ job: jobs, study: studies.name, run: runs.fileName, tree: trees.name, role: memberships.role })
    .from(jobs)
    .innerJoin(studies, eq(studies.id, jobs.studyId))
    .innerJoin(groups, eq(groups.id, studies.groupId))
    .innerJoin(memberships, and(eq(memberships.groupId, groups.id), eq(memberships.userId, actor.id)))
    .leftJoin(runs, eq(runs.id, jobs.subjectId))
    .leftJoin(trees, eq(trees.id, jobs.subjectId))
    .where(
      and(
        or(
          inArray(jobs.state, ['queued', 'running']),
          and(eq(jobs.state, 'failed'), gt(jobs.settledAt, sql`UTC_TIMESTAMP(3) - INTERVAL 14 DAY`))
        ),
        or(ne(memberships.role, 'guest'), inArray(studies.id, opened)),
        or(sql`${runs.id} is not null`, sql`${trees.id} is not null`)
      )
    )
    .orderBy(desc(jobs.createdAt))
    .limit(limit);
  return rows.map(({ job, study, run, tree, role }) => ({
    ...jobView(job),
    study,
    subject: run ?? tree ?? '',
    href: `/studies/${job.studyId}/${tree ? 'trees' : 'runs'}/${job.subjectId}`,
    canManage: may(role, NEEDED[job.kind])
  }));
}
