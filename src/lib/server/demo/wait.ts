import { and, desc, eq } from 'drizzle-orm';
import { setTimeout as sleep } from 'node:timers/promises';
import { database } from '../db';
import { jobs } from '../db/schema';
import type { JobKind } from '../jobs/queue';

/** ms that one job may take, waiting in the queue included */
const PATIENCE = 90_000;

/**
 * Waits until the newest job of a kind on a subject is done. Somebody else works on it: the web server, or the runner
 * of this process.
 * @returns the job's result
 * @throws Error when it failed, was cancelled, or took too long
 */
export async function jobDone(kind: JobKind, subjectId: string): Promise<unknown> {
  const end = performance.now() + PATIENCE;
  for (;;) {
    const [job] = await database()
      .select()
      .from(jobs)
      .where(and(eq(jobs.kind, kind), eq(jobs.subjectId, subjectId)))
      .orderBy(desc(jobs.createdAt))
      .limit(1);
    if (job?.state === 'done') return job.result;
    if (job?.state === 'failed' || job?.state === 'cancelled')
      throw new Error(`A job of the demo (${kind}) ended as ${job.state}: ${job.error?.message ?? 'no reason given'}`);
    if (performance.now() > end)
      throw new Error(
        `A job of the demo (${kind}) was not done within ${PATIENCE / 1000} s (${job?.state ?? 'absent'}).`
      );
    await sleep(100);
  }
}
