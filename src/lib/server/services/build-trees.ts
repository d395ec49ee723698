import { and, between, eq, inArray } from 'drizzle-orm';
import { randomUUID } from 'node:crypto';
import type { z } from 'zod';
import type { AssembledTree } from '$lib/core/model';
import { assemble } from '$lib/core/tree';
import { buildInputSchema, type BuildResult, type buildTreesSchema } from '$lib/schema/run';
import type { GroupDefaults } from '$lib/schema/group';
import type { TreeSettings } from '$lib/schema/tree';
import { requireRun, type Actor } from '../auth/authorize';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { groups, jobs, runPrecursors, runs, studies, trees, users } from '../db/schema';
import { ServiceError } from '../errors';
import { goOn, type JobContext } from '../jobs/job';
import { enqueue } from '../jobs/queue';
import { audit } from './audit';
import { familyScans, surveyIndex } from './family-scans';
import { insertTree } from './tree-rows';

/** Trees of one request; more is no work that a person could look through. */
const MAX_TREES = 200;
/** Two precursor m/z of one run this close are the same row of its list. */
const SAME_MZ = 1e-6;

type Precursor = typeof runPrecursors.$inferSelect;

/** Queues the building of trees from chosen precursor ions of a run. @returns the job's id @throws ServiceError */
export async function startBuild(
  actor: Actor | null,
  runId: string,
  input: z.output<typeof buildTreesSchema>
): Promise<string> {
  const { run, study, group } = await requireRun(actor, runId, 'tree.build');
  if (run.state !== 'ready')
    throw new ServiceError(
      'conflict',
      'This run has not been read yet.',
      'Wait until it is ready, then build its trees.'
    );
  const chosen = await database()
    .select({ id: runPrecursors.id })
    .from(runPrecursors)
    .where(
      input.precursorIds === 'all'
        ? eq(runPrecursors.runId, runId)
        : and(eq(runPrecursors.runId, runId), inArray(runPrecursors.id, input.precursorIds))
    )
    .orderBy(runPrecursors.position);
  if (!chosen.length || (input.precursorIds !== 'all' && chosen.length < new Set(input.precursorIds).size))
    throw new ServiceError(
      'invalid',
      'A chosen precursor ion is not in this run.',
      'Reload the page and choose again.'
    );
  if (chosen.length > MAX_TREES)
    throw new ServiceError(
      'invalid',
      `${chosen.length} precursor ions were chosen; at most ${MAX_TREES} trees are built at once.`,
      'Choose the ions that matter, or build in several steps.'
    );
  return database().transaction(async (tx) => {
    // One build at a time on a run: two would not see each other's trees.
    await tx.select({ id: runs.id }).from(runs).where(eq(runs.id, runId)).for('update');
    const [busy] = await tx
      .select({ id: jobs.id })
      .from(jobs)
      .where(and(eq(jobs.subjectId, runId), eq(jobs.kind, 'build-trees'), inArray(jobs.state, ['queued', 'running'])));
    if (busy)
      throw new ServiceError('conflict', 'Trees of this run are being built already.', 'Wait until that is done.', {
        jobId: busy.id
      });
    return enqueue(tx, {
      kind: 'build-trees',
      groupId: group.id,
      studyId: study.id,
      subjectId: runId,
      input: { precursorIds: chosen.map(({ id }) => id), separateEnergies: input.separateEnergies },
      createdBy: actor?.id ?? null,
      what: 'Waiting to build trees'
    });
  });
}

async function existingTree(tx: Executor, runId: string, mz: number, polarity: string, separate: boolean) {
  const rows = await tx
    .select({ id: trees.id, name: trees.name, polarity: trees.polarity, settings: trees.settings })
    .from(trees)
    .where(and(eq(trees.runId, runId), between(trees.precursorMz, mz - SAME_MZ, mz + SAME_MZ)));
  return rows.find((row) => row.polarity === polarity && row.settings.separateEnergies === separate) ?? null;
}

/** What all trees of one job share. */
interface Build {
  run: typeof runs.$inferSelect;
  defaults: GroupDefaults;
  separateEnergies: boolean;
  groupId: string;
  actor: Actor | null;
}

async function prepare(tx: Executor, context: JobContext, separateEnergies: boolean): Promise<Build> {
  const { subjectId, createdBy } = context.job;
  const [row] = await tx
    .select({ run: runs, group: groups })
    .from(runs)
    .innerJoin(studies, eq(studies.id, runs.studyId))
    .innerJoin(groups, eq(groups.id, studies.groupId))
    .where(eq(runs.id, subjectId));
  if (!row) throw new ServiceError('gone', 'The run was deleted meanwhile.', null);
  const [person] = createdBy
    ? await tx.select({ id: users.id, name: users.name }).from(users).where(eq(users.id, createdBy))
    : [];
  return {
    run: row.run,
    groupId: row.group.id,
    actor: person ?? null,
    defaults: row.group.defaults,
    separateEnergies
  };
}

/** The group's defaults for a new tree. With several analysers the tolerance stays open: it follows each spectrum. */
function settingsOf({ defaults, separateEnergies }: Build, tree: AssembledTree): TreeSettings {
  const analysers = new Set(tree.spectra.map((spectrum) => spectrum.analyser));
  const [only] = analysers.size === 1 ? analysers : [];
  const tolerance = (only && defaults.tolerances[only]) ?? null;
  return { elements: defaults.elements, adducts: defaults.adducts, tolerance, separateEnergies };
}

async function write(
  tx: Executor,
  build: Build,
  tree: AssembledTree,
  id: string
): Promise<BuildResult['trees'][number]> {
  const { run, separateEnergies, actor, groupId } = build;
  const settings = settingsOf(build, tree);
  const there = await existingTree(tx, run.id, tree.precursorMz, tree.polarity, separateEnergies);
  if (there) return { id: there.id, name: there.name, isNew: there.id === id };
  const name = `m/z ${tree.precursorMz.toFixed(4)}`;
  await insertTree(tx, { id, studyId: run.studyId, runId: run.id, name, settings, createdBy: actor?.id ?? null }, tree);
  await tx.update(studies).set({ updatedAt: new Date() }).where(eq(studies.id, run.studyId));
  await audit(tx, actor, {
    groupId,
    action: 'tree.built',
    subjectKind: 'tree',
    subjectId: id,
    details: { run: run.id, precursorMz: tree.precursorMz, separateEnergies }
  });
  await enqueue(tx, {
    kind: 'suggest',
    groupId,
    studyId: run.studyId,
    subjectId: id,
    input: {},
    createdBy: actor?.id ?? null,
    what: 'Waiting to propose formulas'
  });
  return { id, name, isNew: true };
}

/** The tree of one row of the run's list. */
async function assembleOne(
  context: JobContext,
  build: Build,
  precursor: Precursor,
  survey: Awaited<ReturnType<typeof surveyIndex>>
) {
  const { run, separateEnergies } = build;
  const family = await context.transact((tx) => familyScans(tx, run.id, precursor.mz, precursor.scanIndexes, survey));
  if (!run.info) throw new ServiceError('conflict', 'This run has not been read yet.', 'Wait until it is ready.');
  const options = { precursorMz: precursor.mz, separateEnergies };
  const [tree] = assemble(family, run.info, options).trees;
  if (!tree)
    throw new ServiceError(
      'invalid',
      `The scans of m/z ${precursor.mz.toFixed(4)} could not be joined to a tree.`,
      'Read the run again, then build its trees.'
    );
  return { ...tree, precursorMz: precursor.mz };
}

/**
 * Work of a 'build-trees' job: one transaction for each tree, so that what is done stays done. A tree that exists
 * already for the same ion and settings is named, not built twice. Formulas are proposed by jobs of their own.
 */
export async function buildTreesJob(context: JobContext): Promise<BuildResult> {
  const input = buildInputSchema.parse(context.job.input);
  const build = await context.transact((tx) => prepare(tx, context, input.separateEnergies));
  const precursors = await context.transact((tx) =>
    tx
      .select()
      .from(runPrecursors)
      .where(and(eq(runPrecursors.runId, build.run.id), inArray(runPrecursors.id, input.precursorIds)))
      .orderBy(runPrecursors.position)
  );
  const survey = await context.transact((tx) => surveyIndex(tx, build.run.id));
  const result: BuildResult = { trees: [] };
  for (const [i, precursor] of precursors.entries()) {
    goOn(context);
    context.report({ done: i, total: precursors.length, what: `Building the tree of m/z ${precursor.mz.toFixed(4)}` });
    const tree = await assembleOne(context, build, precursor, survey);
    const id = randomUUID();
    result.trees.push(await context.transact((tx) => write(tx, build, tree, id)));
  }
  return result;
}
