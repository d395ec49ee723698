import { eq } from 'drizzle-orm';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import type { TreePatch } from '$lib/schema/workbench';
import { closeDatabase, database } from '$lib/server/db';
import { ions, remarks, studyGuests, trees } from '$lib/server/db/schema';
import { decideClaims } from '$lib/server/services/claims';
import { ionDetail } from '$lib/server/services/ion-detail';
import { editTree } from '$lib/server/services/tree-edit';
import { workbenchView } from '$lib/server/services/workbench';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf, makeGroup, makePerson, makeStudy, type TestPerson } from '../helpers/people';
import { makeCaffeineTree, treeNow } from './support/claim-tree';

let store: TestDatabase;
let annotator: TestPerson, reviewer: TestPerson, guest: TestPerson, outsider: TestPerson;
let study: string, otherStudy: string;
let tree: Awaited<ReturnType<typeof makeCaffeineTree>>;

beforeAll(async () => {
  store = await openTestDatabase();
  [annotator, reviewer, guest, outsider] = await Promise.all(
    ['annotator', 'reviewer', 'guest', 'outsider'].map(makePerson)
  );
  const group = await makeGroup('Extracts', [
    [annotator, 'annotator'],
    [reviewer, 'reviewer'],
    [guest, 'guest']
  ]);
  study = await makeStudy(group, 'Stimulants');
  otherStudy = await makeStudy(group, 'Closed to the guest');
  await database().insert(studyGuests).values({ studyId: study, userId: guest.id });
});
beforeEach(async () => {
  tree = await makeCaffeineTree(study);
});
afterAll(async () => {
  await closeDatabase();
  await store.close();
});

const edit = (patch: Omit<TreePatch, 'version'>, version = 1) =>
  editTree(annotator, tree.treeId, { version, ...patch });

describe('the whole view', () => {
  it('holds facts, spectra, ions as columns and what the viewer may do', async () => {
    const view = await workbenchView(annotator, tree.treeId);
    expect(view.tree).toMatchObject({ name: 'Caffeine', ionFormula: 'C8H11N4O2', version: 1, revision: null });
    expect(view.spectra.map((s) => [s.level, s.parent, s.scanCount])).toEqual([
      [2, null, 2],
      [3, 0, 2]
    ]);
    expect(view.ions.id).toHaveLength(5);
    expect(view.ions.state).toBe('pppop');
    expect(view.ions.strings[view.ions.loss[4]]).toBe('CO');
    expect(view.can).toMatchObject({ decide: true, edit: true, review: false });
  });

  it('tells a reviewer and a guest what they may not', async () => {
    expect((await workbenchView(reviewer, tree.treeId)).can).toMatchObject({
      decide: false,
      edit: false,
      remark: true
    });
    expect((await workbenchView(guest, tree.treeId)).can).toMatchObject({
      decide: false,
      remark: false,
      report: false
    });
  });

  it('is not there for strangers, other groups and guests of another study', async () => {
    expect(await codeOf(workbenchView(null, tree.treeId))).toBe('unauthenticated');
    expect(await codeOf(workbenchView(outsider, tree.treeId))).toBe('not-found');
    const closed = await makeCaffeineTree(otherStudy);
    expect(await codeOf(workbenchView(guest, closed.treeId))).toBe('not-found');
    expect(await codeOf(workbenchView(annotator, closed.treeId, study))).toBe('not-found');
  });

  it('counts open threads, not replies, at their anchors', async () => {
    const first = {
      id: crypto.randomUUID(),
      treeId: tree.treeId,
      anchor: 'ion' as const,
      ionId: tree.big,
      body: 'why?'
    };
    await database()
      .insert(remarks)
      .values([
        { ...first, spectrum: 0 },
        { ...first, id: crypto.randomUUID(), spectrum: 0, threadId: first.id },
        { ...first, id: crypto.randomUUID(), spectrum: 0, resolvedAt: new Date() },
        { id: crypto.randomUUID(), treeId: tree.treeId, anchor: 'spectrum', spectrum: 1, body: 'noisy' },
        { id: crypto.randomUUID(), treeId: tree.treeId, anchor: 'tree', body: 'adduct?' }
      ]);
    const { remarks: open } = await workbenchView(annotator, tree.treeId);
    expect(open).toEqual({ open: 3, tree: 1, spectra: { 1: 1 }, ions: { [tree.big]: 1 } });
  });

  it('carries ten thousand ions in about a megabyte', async () => {
    const [row] = await database().select().from(ions).where(eq(ions.id, tree.small));
    const { id: _id, ...copy } = row;
    for (let block = 0; block < 10; block++)
      await database()
        .insert(ions)
        .values(
          Array.from({ length: 1000 }, (_, i) => ({
            ...copy,
            position: 10 + block * 1000 + i,
            mz: 60 + block * 10 + i / 100
          }))
        );
    const view = await workbenchView(annotator, tree.treeId);
    expect(view.ions.id).toHaveLength(10_005);
    expect(view.ions.strings.length).toBeLessThan(20);
    expect(JSON.stringify(view).length).toBeLessThan(1_200_000);
  });
});

describe('one ion', () => {
  it('says where else it is seen and who decided what', async () => {
    await decideClaims(annotator, tree.treeId, [{ ionId: tree.small, version: 1, action: 'confirm' }]);
    const detail = await ionDetail(reviewer, tree.treeId, tree.small);
    expect(detail.seen.map((s) => [s.spectrum, s.ionId, s.scans, s.scanTotal])).toEqual([
      [0, tree.small, 2, 2],
      [1, tree.stage3, 2, 2]
    ]);
    expect(detail.seen[0].relative).toBeCloseTo(12, 6);
    expect(detail.history).toMatchObject([{ action: 'confirmed', who: 'annotator', after: { state: 'confirmed' } }]);
    expect(detail).toMatchObject({ decidedBy: 'annotator', breakdown: null });
  });

  it('finds the 13C peak beside it with the share that the whole ion would have', async () => {
    const [row] = await database().select().from(ions).where(eq(ions.id, tree.small));
    const { id: _id, ...copy } = row;
    // 13C − 12C = 1.0033548 u (AME2020); five carbons at 1.07 % and three nitrogens at 0.364 % (IUPAC 2013) give 6.5 %.
    await database()
      .insert(ions)
      .values({ ...copy, position: 50, mz: row.mz + 1.0033548, intensity: 3, formula: null, state: 'open' });
    const { isotopes } = await ionDetail(annotator, tree.treeId, tree.small);
    expect(isotopes).toHaveLength(1);
    expect(isotopes[0]).toMatchObject({ label: '13C', relative: 5 });
    expect(isotopes[0].expected).toBeGreaterThan(5.3);
    expect(isotopes[0].expected).toBeLessThan(6.8);
  });

  it('is not reached through another tree', async () => {
    const other = await makeCaffeineTree(study);
    expect(await codeOf(ionDetail(annotator, tree.treeId, other.small))).toBe('not-found');
    expect(await codeOf(ionDetail(outsider, tree.treeId, tree.small))).toBe('not-found');
  });
});

describe('editing the tree', () => {
  it('renames and sets settings, and refuses a stale version', async () => {
    const settings = { elements: 'C0-20H0-40N0-6O0-6', adducts: ['M+H'], tolerance: null, separateEnergies: false };
    await edit({ name: 'Caffeine, repeat', settings: { ...settings, adducts: ['[M+H]+'] } });
    expect(await treeNow(tree.treeId)).toMatchObject({ name: 'Caffeine, repeat', version: 2 });
    expect(await codeOf(edit({ name: 'late' }))).toBe('conflict');
    expect((await treeNow(tree.treeId)).name).toBe('Caffeine, repeat');
  });

  it('refuses settings that the core cannot read', async () => {
    const settings = { elements: null, adducts: [] as string[], tolerance: null, separateEnergies: false };
    expect(await codeOf(edit({ settings: { ...settings, elements: 'C5-2' } }))).toBe('invalid');
    expect(await codeOf(edit({ settings: { ...settings, adducts: ['[M+Q]+'] } }))).toBe('invalid');
    expect(await codeOf(edit({ settings: { ...settings, adducts: ['[M-H]-'] } }))).toBe('invalid');
    expect(await codeOf(edit({ settings: { ...settings, tolerance: { ppm: 0, mda: 0 } } }))).toBe('invalid');
    expect((await treeNow(tree.treeId)).version).toBe(1);
  });

  it('fixes a precursor formula that fits the m/z, and frees it for the first-ranked one', async () => {
    const candidate = {
      ...{ rank: 1, formula: 'C8H10N4O2', adduct: '[M+H]+', ionFormula: 'C8H11N4O2', errorPpm: 0 },
      ...{ dbe: 6, score: 1, terms: {}, explainedIntensity: 1 }
    };
    await database()
      .update(trees)
      .set({ formula: null, candidates: [candidate] })
      .where(eq(trees.id, tree.treeId));
    expect(await codeOf(edit({ formula: 'C9H10N4O2' }))).toBe('invalid');
    expect(await codeOf(edit({ formula: 'C8H10N4O2', adduct: '[M+Na]+' }))).toBe('invalid');
    await edit({ formula: 'O2N4H10C8' });
    expect(await treeNow(tree.treeId)).toMatchObject({ formula: 'C8H10N4O2', formulaFixed: true });
    await edit({ formula: null }, 2);
    expect(await treeNow(tree.treeId)).toMatchObject({ formula: 'C8H10N4O2', formulaFixed: false, version: 3 });
  });

  it('is for annotators and leads only', async () => {
    for (const person of [reviewer, guest])
      expect(await codeOf(editTree(person, tree.treeId, { version: 1, name: 'x' }))).toBe('forbidden');
    expect(await codeOf(editTree(outsider, tree.treeId, { version: 1, name: 'x' }))).toBe('not-found');
  });
});
