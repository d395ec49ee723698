import { asc, eq } from 'drizzle-orm';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { readRun } from '$lib/core/mzml';
import { assemble } from '$lib/core/tree';
import type { BuildResult } from '$lib/schema/run';
import type { Actor } from '$lib/server/auth/authorize';
import { database } from '$lib/server/db';
import { auditLog, ions, jobs, runPrecursors, trees, treeSpectra } from '$lib/server/db/schema';
import { jobContext, type JobOutcome } from '$lib/server/jobs/job';
import { perform } from '$lib/server/jobs/perform';
import { claim, type JobKind } from '$lib/server/jobs/queue';
import { settle } from '$lib/server/jobs/settle';
import { startBuild } from '$lib/server/services/build-trees';
import { deleteRun, listRuns, runPage } from '$lib/server/services/runs';
import { startSuggest } from '$lib/server/services/suggest-tree';
import { loadAssembledTree } from '$lib/server/services/tree-rows';
import { fileStore } from '$lib/server/storage';
import { addPerson, addRun, addStudy, IONS, openStage, smallRun, type Stage } from './support/stage';

let stage: Stage;
let annotator: Actor;
let reviewer: Actor;
let stranger: Actor;
let place: { groupId: string; studyId: string };
let runId: string;

beforeAll(async () => {
  stage = await openStage();
  annotator = await addPerson(database(), 'annotator');
  reviewer = await addPerson(database(), 'reviewer');
  stranger = await addPerson(database(), 'stranger');
});
afterAll(() => stage.close());
beforeEach(async () => {
  await database().delete(jobs);
  place = await addStudy(database(), [
    [annotator, 'annotator'],
    [reviewer, 'reviewer']
  ]);
  runId = (await addRun(database(), place, smallRun())).runId;
  await work('read-run');
});

/** Claims the oldest job of a kind and does it in this thread. @param meanwhile what people do during the computation */
async function work(kind: JobKind, meanwhile?: () => Promise<void>): Promise<JobOutcome> {
  const job = await claim(database(), 'test:1:x', [kind]);
  if (!job) throw new Error(`no ${kind} is queued`);
  const context = jobContext({
    db: database(),
    store: fileStore(),
    job,
    report: () => undefined,
    isCancelled: () => false
  });
  let turns = 0;
  const outcome = await perform({
    ...context,
    transact: async (act) => {
      if (turns++ === 1) await meanwhile?.();
      return context.transact(act);
    }
  });
  await settle(database(), job, outcome);
  return outcome;
}

async function build(separateEnergies = false): Promise<BuildResult> {
  await startBuild(annotator, runId, { precursorIds: 'all', separateEnergies });
  const outcome = await work('build-trees');
  if (outcome.kind !== 'done') throw new Error(JSON.stringify(outcome));
  return outcome.result as BuildResult;
}

const ionsOf = (treeId: string) =>
  database().select().from(ions).where(eq(ions.treeId, treeId)).orderBy(asc(ions.spectrum), asc(ions.position));
const treeOf = async (treeId: string) => (await database().select().from(trees).where(eq(trees.id, treeId)))[0];
const near = (mz: number) => (ion: { mz: number }) => Math.abs(ion.mz - mz) < 1e-6;

describe('building trees', () => {
  it('writes the same tree as the core assembles from the file', async () => {
    const [{ id, name, isNew }] = (await build()).trees;
    expect({ name, isNew }).toEqual({ name: 'm/z 195.0877', isNew: true });
    async function* file() {
      yield smallRun();
    }
    const { scans, summary } = await readRun(file());
    const [expected] = assemble(scans, summary.info).trees;
    const stored = await loadAssembledTree(database(), id);
    // Intensities are stored with 32 bits.
    const rounded = expected.spectra.map((spectrum) => ({
      ...spectrum,
      peaks: { ...spectrum.peaks, intensity: Float64Array.from(Float32Array.from(spectrum.peaks.intensity)) }
    }));
    expect(stored?.spectra).toEqual(rounded);
    expect(stored).toMatchObject({ precursorMz: expected.precursorMz, charge: 1, polarity: 'positive' });
    expect([...(stored?.ms1?.mz ?? [])]).toEqual([...(expected.ms1?.mz ?? [])]);
  });

  it('starts every ion open, notes the act, and queues the suggestion', async () => {
    const [{ id }] = (await build()).trees;
    const rows = await ionsOf(id);
    expect(rows).toHaveLength(5);
    expect(new Set(rows.map((ion) => ion.state))).toEqual(new Set(['open']));
    const spectra = await database().select().from(treeSpectra).where(eq(treeSpectra.treeId, id));
    expect(spectra.map((spectrum) => [spectrum.level, spectrum.parent, spectrum.linkedBy])).toEqual([
      [2, null, 'reference'],
      [3, 0, 'reference']
    ]);
    const [line] = await database().select().from(auditLog).where(eq(auditLog.subjectId, id));
    expect(line.action).toBe('tree.built');
    const [job] = await database().select().from(jobs).where(eq(jobs.subjectId, id));
    expect(job).toMatchObject({ kind: 'suggest', state: 'queued' });
  });

  it('names a tree that exists already instead of building it twice', async () => {
    const [first] = (await build()).trees;
    const [second] = (await build()).trees;
    expect(second).toEqual({ id: first.id, name: first.name, isNew: false });
    const [apart] = (await build(true)).trees;
    expect(apart.isNew).toBe(true);
  });

  it('refuses ions of another run, a second build at once, and people who may not', async () => {
    const other = (await addRun(database(), place, smallRun(1))).runId;
    await work('read-run');
    const [foreign] = await database().select().from(runPrecursors).where(eq(runPrecursors.runId, other));
    const chosen = (precursorIds: string[] | 'all') => ({ precursorIds, separateEnergies: false });
    await expect(startBuild(annotator, runId, chosen([foreign.id]))).rejects.toMatchObject({ code: 'invalid' });
    await expect(startBuild(reviewer, runId, chosen('all'))).rejects.toMatchObject({ code: 'forbidden' });
    await expect(startBuild(stranger, runId, chosen('all'))).rejects.toMatchObject({ code: 'not-found' });
    await expect(startBuild(null, runId, chosen('all'))).rejects.toMatchObject({ code: 'unauthenticated' });
    await startBuild(annotator, runId, chosen('all'));
    await expect(startBuild(annotator, runId, chosen('all'))).rejects.toMatchObject({ code: 'conflict' });
  });
});

describe('suggesting', () => {
  // Caffeine: monoisotopic [M+H]+ of C8H10N4O2 is 195.0877, its loss of CH3NCO gives C6H8N3O+ (138.0662).
  // IUPAC/CIAAW atomic masses.
  it('proposes formulas for the precursor ion and its product ions', async () => {
    const [{ id }] = (await build()).trees;
    expect((await work('suggest')).kind).toBe('done');
    const tree = await treeOf(id);
    expect(tree.candidates[0]).toMatchObject({ rank: 1, ionFormula: 'C8H11N4O2' });
    expect(tree).toMatchObject({ formula: tree.candidates[0].formula, adduct: tree.candidates[0].adduct });
    expect(tree).toMatchObject({ status: 'draft', version: 2 });
    expect(tree.suggestedAt).not.toBeNull();
    expect(tree.explained).toBeGreaterThan(0.9);
    const rows = await ionsOf(id);
    expect(rows.find(near(IONS.first))).toMatchObject({
      state: 'proposed',
      formula: 'C6H8N3O',
      loss: 'C2H3NO',
      version: 2
    });
    expect(rows.every((ion) => ion.alternatives.length <= 12)).toBe(true);
  });

  it('never overwrites what a person decided, before or during the computation', async () => {
    const [{ id }] = (await build()).trees;
    await work('suggest');
    const [before, during] = [(await ionsOf(id)).find(near(IONS.first))!, (await ionsOf(id)).find(near(IONS.third))!];
    const decision = { decidedBy: annotator.id, decidedAt: new Date() };
    await database()
      .update(ions)
      .set({ ...decision, state: 'rejected', formula: null, version: 7 })
      .where(eq(ions.id, before.id));
    await startSuggest(annotator, id);
    await work('suggest', async () => {
      await database()
        .update(ions)
        .set({ ...decision, state: 'confirmed', formula: 'C4H7N2', version: 9, reason: 'seen before' })
        .where(eq(ions.id, during.id));
    });
    const after = await ionsOf(id);
    expect(after.find((ion) => ion.id === before.id)).toMatchObject({ state: 'rejected', formula: null, version: 7 });
    expect(after.find((ion) => ion.id === during.id)).toMatchObject({
      state: 'confirmed',
      formula: 'C4H7N2',
      version: 9,
      reason: 'seen before'
    });
  });

  it('asks again when the formula was fixed during the computation, and keeps it', async () => {
    const [{ id }] = (await build()).trees;
    await work('suggest', async () => {
      await database()
        .update(trees)
        .set({ formula: 'C6H14N2O5', adduct: '[M+H]+', formulaFixed: true })
        .where(eq(trees.id, id));
    });
    const tree = await treeOf(id);
    expect(tree).toMatchObject({ formula: 'C6H14N2O5', formulaFixed: true });
    expect(tree.candidates.map((candidate) => candidate.formula)).toEqual(['C6H14N2O5']);
  });

  it('changes nothing the second time, and piles up no notes', async () => {
    const [{ id }] = (await build()).trees;
    await work('suggest');
    const [first, rows] = [await treeOf(id), await ionsOf(id)];
    await startSuggest(annotator, id);
    await work('suggest');
    expect((await treeOf(id)).notes).toEqual(first.notes);
    expect(await ionsOf(id)).toEqual(rows);
  });

  it('turns an approved tree into a draft', async () => {
    const [{ id }] = (await build()).trees;
    await database().update(trees).set({ status: 'approved' }).where(eq(trees.id, id));
    await work('suggest');
    expect((await treeOf(id)).status).toBe('draft');
  });

  it('is queued once, and only by people who may', async () => {
    const [{ id }] = (await build()).trees;
    expect(await startSuggest(annotator, id)).toBe(await startSuggest(annotator, id));
    await expect(startSuggest(reviewer, id)).rejects.toMatchObject({ code: 'forbidden' });
    await expect(startSuggest(stranger, id)).rejects.toMatchObject({ code: 'not-found' });
  });

  it('tells an impossible setting in words', async () => {
    const [{ id }] = (await build()).trees;
    const { settings } = await treeOf(id);
    await database()
      .update(trees)
      .set({ settings: { ...settings, elements: 'Xq0-4' } })
      .where(eq(trees.id, id));
    const outcome = await work('suggest');
    expect(outcome).toMatchObject({ kind: 'failed', failure: { code: 'bad-elements', again: false } });
  });
});

describe('the run page', () => {
  it('shows the run, its precursor ions with their trees, and the ion current', async () => {
    const [{ id }] = (await build()).trees;
    const page = await runPage(reviewer, place.studyId, runId);
    expect(page.precursors).toHaveLength(1);
    expect(page.precursors[0].trees).toEqual([{ id, name: 'm/z 195.0877' }]);
    expect(page.current.traces.map((trace) => [trace.level, trace.x])).toEqual([
      [1, [0, 3, 6]],
      [2, [1, 4, 7]],
      [3, [2, 5, 8]]
    ]);
    expect(page.can).toMatchObject({ build: false });
    const [row] = await listRuns(annotator, place.studyId);
    expect(row).toMatchObject({ id: runId, trees: 1, precursors: 1, state: 'ready', scans: { 1: 3, 2: 3, 3: 3 } });
    await expect(runPage(stranger, place.studyId, runId)).rejects.toMatchObject({ code: 'not-found' });
    await expect(listRuns(stranger, place.studyId)).rejects.toMatchObject({ code: 'not-found' });
  });

  it('deletes a run with its file, but not the evidence of a tree', async () => {
    const [{ id }] = (await build()).trees;
    await expect(deleteRun(annotator, place.studyId, runId)).rejects.toMatchObject({ code: 'conflict' });
    await database().delete(trees).where(eq(trees.id, id));
    await expect(deleteRun(reviewer, place.studyId, runId)).rejects.toMatchObject({ code: 'forbidden' });
    await expect(deleteRun(stranger, place.studyId, runId)).rejects.toMatchObject({ code: 'not-found' });
    await deleteRun(annotator, place.studyId, runId);
    expect(await fileStore().size(`runs/${runId}`)).toBeNull();
    expect(await listRuns(annotator, place.studyId)).toEqual([]);
  });
});
