import { and, desc, eq, inArray, sql } from 'drizzle-orm';
import { isDeepStrictEqual } from 'node:util';
import { parseElementRanges } from '$lib/core/chem';
import type { IonConstraint, RunInfo, Suggestion, SuggestOptions } from '$lib/core/model';
import { defaultSuggestOptions, suggest } from '$lib/core/suggest';
import { requireTree, type Actor } from '../auth/authorize';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { ions, jobs, runs, trees } from '../db/schema';
import { ServiceError } from '../errors';
import { goOn, type JobContext } from '../jobs/job';
import { enqueue } from '../jobs/queue';
import { constraintsOf } from './decided-ions';
import { updateExplained } from './explained';
import { writeProposals } from './proposal-rows';
import { touchTree } from './tree-touch';
import { loadAssembledTree } from './tree-rows';

type TreeRow = typeof trees.$inferSelect;

/** When the question itself changes during the computation, it is asked again so often. */
const ASKED_AGAIN = 3;

/** Queues a suggestion for a tree; one that is queued or running already is named instead. @returns the job's id */
export async function startSuggest(actor: Actor | null, treeId: string): Promise<string> {
  const { study, group } = await requireTree(actor, treeId, 'tree.edit');
  return database().transaction(async (tx) => {
    await tx.select({ id: trees.id }).from(trees).where(eq(trees.id, treeId)).for('update');
    const [waiting] = await tx
      .select({ id: jobs.id, state: jobs.state })
      .from(jobs)
      .where(and(eq(jobs.subjectId, treeId), eq(jobs.kind, 'suggest'), eq(jobs.state, 'queued')));
    if (waiting) return waiting.id;
    return enqueue(tx, {
      kind: 'suggest',
      groupId: group.id,
      studyId: study.id,
      subjectId: treeId,
      input: {},
      createdBy: actor?.id ?? null,
      what: 'Waiting to propose formulas'
    });
  });
}

/** The part of a tree that the question depends on. */
const questionOf = ({ settings, formula, formulaFixed, adduct }: TreeRow) => ({
  settings,
  formula: formulaFixed ? formula : null,
  adduct: formulaFixed ? adduct : null
});

function optionsOf(tree: TreeRow, info: RunInfo | null, constraints: IonConstraint[]): SuggestOptions {
  const { formula, adduct } = questionOf(tree);
  const defaults = defaultSuggestOptions();
  const { elements, adducts, tolerance } = tree.settings;
  return {
    ...defaults,
    adducts: adduct ? [adduct] : adducts,
    formula,
    elements: elements ? parseElementRanges(elements) : defaults.elements,
    tolerance,
    ionSource: info?.ionSource ?? defaults.ionSource,
    constraints
  };
}

/** Notes of the assembly: those of the tree without what the last suggestion added. */
async function assemblyNotes(tx: Executor, tree: TreeRow): Promise<string[]> {
  const [last] = await tx
    .select({ result: jobs.result })
    .from(jobs)
    .where(and(eq(jobs.subjectId, tree.id), eq(jobs.kind, 'suggest'), eq(jobs.state, 'done')))
    .orderBy(desc(jobs.settledAt))
    .limit(1);
  const { notes = [] } = (last?.result ?? {}) as { notes?: string[] };
  return tree.notes.filter((note) => !notes.includes(note));
}

async function question(tx: Executor, treeId: string) {
  const [row] = await tx
    .select({ tree: trees, info: runs.info })
    .from(trees)
    .innerJoin(runs, eq(runs.id, trees.runId))
    .where(eq(trees.id, treeId));
  const assembled = row && (await loadAssembledTree(tx, treeId));
  if (!row || !assembled) throw new ServiceError('gone', 'The tree was deleted meanwhile.', null);
  const decided = await tx
    .select({ state: ions.state, spectrum: ions.spectrum, mz: ions.mz, formula: ions.formula })
    .from(ions)
    .where(and(eq(ions.treeId, treeId), inArray(ions.state, ['confirmed', 'rejected'])));
  const notes = await assemblyNotes(tx, row.tree);
  return {
    ...row,
    assembled: { ...assembled, notes: [] },
    notes,
    options: optionsOf(row.tree, row.info, constraintsOf(decided))
  };
}

/** Writes candidates and proposals. @returns false when the question changed during the computation: nothing is written */
async function answer(tx: Executor, asked: TreeRow, kept: string[], suggestion: Suggestion): Promise<boolean> {
  const [now] = await tx.select().from(trees).where(eq(trees.id, asked.id)).for('update');
  if (!now) throw new ServiceError('gone', 'The tree was deleted meanwhile.', null);
  if (!isDeepStrictEqual(questionOf(now), questionOf(asked))) return false;
  await writeProposals(tx, now.id, suggestion);
  const first = suggestion.candidates[0];
  await tx
    .update(trees)
    .set({
      candidates: suggestion.candidates,
      notes: [...new Set([...kept, ...suggestion.notes])],
      formula: now.formulaFixed ? now.formula : (first?.formula ?? null),
      adduct: now.formulaFixed && now.adduct ? now.adduct : suggestion.adduct,
      suggestedAt: sql`UTC_TIMESTAMP(3)`
    })
    .where(eq(trees.id, now.id));
  await updateExplained(tx, now.id);
  await touchTree(tx, now.id);
  return true;
}

/**
 * Work of a 'suggest' job: computes proposals from the tree, its settings and people's decisions, and writes them in one
 * transaction. A person's claim is never overwritten; decisions made during the computation stand.
 * @throws CoreError from the search, JobCancelled, JobLost, ServiceError
 */
export async function suggestJob(context: JobContext) {
  const { subjectId } = context.job;
  for (let turn = 1; turn <= ASKED_AGAIN; turn++) {
    const { tree, assembled, notes, options } = await context.transact((tx) => question(tx, subjectId));
    context.report({ done: 0, total: 0, what: `Proposing formulas for m/z ${tree.precursorMz.toFixed(4)}` });
    const suggestion = suggest(assembled, options, {
      onProgress: (done, total, what) => context.report({ done, total, what: `Comparing ${what}` }),
      isCancelled: context.isCancelled
    });
    goOn(context);
    if (await context.transact((tx) => answer(tx, tree, notes, suggestion)))
      return { notes: suggestion.notes, candidates: suggestion.candidates.length };
  }
  throw new ServiceError(
    'conflict',
    'The settings of the tree were changed again and again while formulas were computed.',
    'Start Suggest once the settings are final.'
  );
}
