import { and, asc, desc, eq, inArray, isNotNull, sql } from 'drizzle-orm';
import { may } from '$lib/review/permissions';
import type { PrecursorRow, RunRow } from '$lib/schema/run';
import { requireRun, requireStudy, type Actor } from '../auth/authorize';
import { database } from '../db';
import { ions, jobs, runPrecursors, runs, scans, studies, trees, users } from '../db/schema';
import { ServiceError } from '../errors';
import { fileStore } from '../storage';
import { audit } from './audit';
import { currentTraces } from './chromatogram';
import { latestJobs } from './jobs';

const SAME_MZ = 1e-6;

/** Runs of a study, newest first, with the job that reads each. @throws ServiceError */
export async function listRuns(actor: Actor | null, studyId: string): Promise<RunRow[]> {
  await requireStudy(actor, studyId, 'study.read');
  const db = database();
  const rows = await db
    .select({
      run: runs,
      uploadedBy: users.name,
      trees: sql<number>`(select count(*) from ${trees} where ${trees.runId} = ${runs.id})`.mapWith(Number),
      precursors:
        sql<number>`(select count(*) from ${runPrecursors} where ${runPrecursors.runId} = ${runs.id})`.mapWith(Number)
    })
    .from(runs)
    .leftJoin(users, eq(users.id, runs.uploadedBy))
    .where(eq(runs.studyId, studyId))
    .orderBy(desc(runs.createdAt), asc(runs.id));
  const unread = rows.filter(({ run }) => run.state !== 'ready').map(({ run }) => run.id);
  const reading = await latestJobs(db, unread, ['read-run']);
  return rows.map(({ run, ...rest }) => ({
    ...rest,
    id: run.id,
    fileName: run.fileName,
    bytes: run.bytes,
    state: run.state,
    scans: run.info?.scans ?? null,
    warnings: run.warnings?.length ?? 0,
    error: run.error,
    createdAt: run.createdAt,
    job: reading.get(run.id) ?? null
  }));
}

async function precursorsOf(runId: string): Promise<PrecursorRow[]> {
  const db = database();
  const rows = await db
    .select({
      id: runPrecursors.id,
      mz: runPrecursors.mz,
      charge: runPrecursors.charge,
      isolation: runPrecursors.isolation,
      levels: runPrecursors.levels,
      intensity: runPrecursors.intensity
    })
    .from(runPrecursors)
    .where(eq(runPrecursors.runId, runId))
    .orderBy(asc(runPrecursors.position));
  const built = await db
    .select({ id: trees.id, name: trees.name, mz: trees.precursorMz })
    .from(trees)
    .where(eq(trees.runId, runId))
    .orderBy(asc(trees.createdAt));
  return rows.map((row) => ({
    ...row,
    isolation: row.isolation ?? null,
    trees: built.filter((tree) => Math.abs(tree.mz - row.mz) <= SAME_MZ).map(({ id, name }) => ({ id, name }))
  }));
}

/** Median error (ppm) of the ions that people confirmed in trees of the run; null below three of them. */
async function massErrorOf(runId: string): Promise<{ median: number; ions: number } | null> {
  const rows = await database()
    .select({ error: ions.errorPpm })
    .from(ions)
    .innerJoin(trees, eq(trees.id, ions.treeId))
    .where(and(eq(trees.runId, runId), eq(ions.state, 'confirmed'), isNotNull(ions.errorPpm)))
    .limit(5000);
  const errors = rows.flatMap(({ error }) => error ?? []).sort((a, b) => a - b);
  const middle = errors.length >> 1;
  if (errors.length < 3) return null;
  return {
    median: errors.length % 2 ? errors[middle] : (errors[middle - 1] + errors[middle]) / 2,
    ions: errors.length
  };
}

/** Everything of the run page. @throws ServiceError */
export async function runPage(actor: Actor | null, studyId: string, runId: string) {
  const { run, study, role } = await requireRun(actor, runId, 'study.read', studyId);
  const db = database();
  const current = await db
    .select({ index: scans.index, level: scans.level, time: scans.time, current: scans.totalIonCurrent })
    .from(scans)
    .where(eq(scans.runId, run.state === 'ready' ? runId : ''))
    .orderBy(asc(scans.index));
  const [person] = run.uploadedBy
    ? await db.select({ name: users.name }).from(users).where(eq(users.id, run.uploadedBy))
    : [];
  const reading = await latestJobs(db, [runId], ['read-run']);
  const building = await latestJobs(db, [runId], ['build-trees']);
  const { id, fileName, bytes, state, info, warnings, error, sha256, createdAt, readAt } = run;
  return {
    study: { id: study.id, name: study.name },
    run: { id, fileName, bytes, state, info, warnings: warnings ?? [], error, sha256, createdAt, readAt },
    uploadedBy: person?.name ?? null,
    precursors: await precursorsOf(runId),
    current: currentTraces(current),
    scanCount: current.length,
    massError: await massErrorOf(runId),
    reading: reading.get(runId) ?? null,
    building: building.get(runId) ?? null,
    can: { build: may(role, 'tree.build'), manage: may(role, 'run.manage'), upload: may(role, 'run.upload') }
  };
}

/** Deletes a run with its scans and its file. @throws ServiceError conflict while trees use it or a job works on it */
export async function deleteRun(actor: Actor | null, studyId: string, runId: string): Promise<void> {
  const { run, group } = await requireRun(actor, runId, 'run.manage', studyId);
  await database().transaction(async (tx) => {
    await tx.select({ id: runs.id }).from(runs).where(eq(runs.id, runId)).for('update');
    const used = await tx.select({ name: trees.name }).from(trees).where(eq(trees.runId, runId)).limit(4);
    if (used.length)
      throw new ServiceError(
        'conflict',
        `Trees were built from this run (${used.map((tree) => tree.name).join(', ')}).`,
        'Delete these trees first; the run is their evidence.'
      );
    const [busy] = await tx
      .select({ id: jobs.id })
      .from(jobs)
      .where(and(eq(jobs.subjectId, runId), inArray(jobs.state, ['queued', 'running'])));
    if (busy)
      throw new ServiceError('conflict', 'A job is working on this run.', 'Cancel it first, then delete the run.');
    await tx.delete(jobs).where(eq(jobs.subjectId, runId));
    await tx.delete(runs).where(eq(runs.id, runId));
    await tx.update(studies).set({ updatedAt: new Date() }).where(eq(studies.id, run.studyId));
    await audit(tx, actor, {
      groupId: group.id,
      action: 'run.deleted',
      subjectKind: 'run',
      subjectId: runId,
      details: { fileName: run.fileName, sha256: run.sha256 }
    });
  });
  // Only after the commit: a file without a row is a loss of space, a row without its file a loss of data.
  await fileStore().delete(run.storageKey);
}
