import { and, eq } from 'drizzle-orm';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import type { ClaimDecision } from '$lib/schema/tree';
import { closeDatabase, database } from '$lib/server/db';
import { auditLog, claimHistory, trees } from '$lib/server/db/schema';
import { ServiceError } from '$lib/server/errors';
import { decideClaims } from '$lib/server/services/claims';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf, makeGroup, makePerson, makeStudy, type TestPerson } from '../helpers/people';
import { ionNow, makeCaffeineTree, treeNow } from './support/claim-tree';

let store: TestDatabase;
let annotator: TestPerson, lead: TestPerson, reviewer: TestPerson, guest: TestPerson, outsider: TestPerson;
let study: string;
let tree: Awaited<ReturnType<typeof makeCaffeineTree>>;

beforeAll(async () => {
  store = await openTestDatabase();
  [annotator, lead, reviewer, guest, outsider] = await Promise.all(
    ['annotator', 'lead', 'reviewer', 'guest', 'outsider'].map(makePerson)
  );
  const group = await makeGroup('Extracts', [
    [annotator, 'annotator'],
    [lead, 'lead'],
    [reviewer, 'reviewer'],
    [guest, 'guest']
  ]);
  await makeGroup('Elsewhere', [[outsider, 'lead']]);
  study = await makeStudy(group, 'Stimulants');
});
beforeEach(async () => {
  tree = await makeCaffeineTree(study);
});
afterAll(async () => {
  await closeDatabase();
  await store.close();
});

const decide = (...decisions: ClaimDecision[]) => decideClaims(annotator, tree.treeId, decisions);
const confirm = (ionId: number, over: Partial<ClaimDecision> = {}): ClaimDecision => ({
  ...{ ionId, version: 1, action: 'confirm' },
  ...over
});
const refusalOf = async (work: Promise<unknown>): Promise<ServiceError> => {
  try {
    await work;
  } catch (e) {
    if (e instanceof ServiceError) return e;
    throw e;
  }
  throw new Error('the decision was taken');
};

describe('deciding claims', () => {
  it('confirms with history, audit entry, a new tree version and the ion current explained', async () => {
    const result = await decide(confirm(tree.big, { reason: 'seen in three runs' }));
    expect(result.ions).toMatchObject([{ id: tree.big, version: 2, state: 'confirmed', decided: true }]);
    expect(result.treeVersion).toBe(2);
    // Product ions 300 + 60 + 100 of 300 + 60 + 40 + 100; the intact precursor ion does not count.
    expect(result.explained).toBeCloseTo(460 / 500, 10);
    expect((await treeNow(tree.treeId)).explained).toBeCloseTo(460 / 500, 10);
    expect(await ionNow(tree.big)).toMatchObject({ decidedBy: annotator.id, reason: 'seen in three runs' });
    const [entry] = await database().select().from(claimHistory).where(eq(claimHistory.ionId, tree.big));
    expect(entry).toMatchObject({ action: 'confirmed', actorId: annotator.id });
    expect([entry.before.state, entry.after.state]).toEqual(['proposed', 'confirmed']);
    const acts = await database()
      .select()
      .from(auditLog)
      .where(and(eq(auditLog.subjectKind, 'ion'), eq(auditLog.subjectId, String(tree.big))));
    expect(acts.map((act) => act.action)).toEqual(['claim.confirmed']);
  });

  it('counts a rejected claim as unexplained', async () => {
    const { explained } = await decide(confirm(tree.big, { action: 'reject' }));
    expect(explained).toBeCloseTo(160 / 500, 10);
  });

  it('computes error, DBE, loss and link of a formula that a person names', async () => {
    const [ion] = (await decide(confirm(tree.unknown, { formula: 'N2H7C4' }))).ions;
    // C4H7N2+ is m/z 83.06037 (AME2020 masses less one electron, CODATA 2018); from C8H11N4O2 it loses C4H4N2O2.
    expect(ion).toMatchObject({ formula: 'C4H7N2', dbe: 2.5, loss: 'C4H4N2O2', link: 'measured', lossRadical: false });
    expect(ion.errorPpm).toBeCloseTo(0.3, 0);
  });

  it('refuses a formula far from the found m/z', async () => {
    // C5H7O+ is m/z 83.0491 (AME2020), the ion was found at 83.0604.
    const error = await refusalOf(decide(confirm(tree.unknown, { formula: 'C5H7O' })));
    expect(error).toMatchObject({ code: 'invalid', message: expect.stringMatching(/ppm apart/) });
    expect(await ionNow(tree.unknown)).toMatchObject({ state: 'open', formula: null, version: 1 });
  });

  it('refuses a formula with atoms that the precursor ion lacks, and names them both', async () => {
    await database().update(trees).set({ formula: 'C8H14O5' }).where(eq(trees.id, tree.treeId));
    const error = await refusalOf(decide(confirm(tree.unknown, { formula: 'C4H7N2' })));
    expect(error).toMatchObject({
      code: 'invalid',
      message: expect.stringMatching(/C4H7N2 .*precursor ion C8H15O5 does not have/)
    });
    expect(await ionNow(tree.unknown)).toMatchObject({ state: 'open', version: 1 });
  });

  it('says where a formula cannot be read', async () => {
    const error = await refusalOf(decide(confirm(tree.unknown, { formula: 'C4Zz7' })));
    expect(error.message).toMatch(/character 3/);
  });

  it('leaves an ion open only with a reason', async () => {
    expect((await refusalOf(decide(confirm(tree.small, { action: 'open' })))).code).toBe('invalid');
    const [ion] = (await decide(confirm(tree.small, { action: 'open', reason: 'two overlapping ions' }))).ions;
    expect(ion).toMatchObject({ state: 'open', formula: null, loss: null, reason: 'two overlapping ions' });
  });

  it('has nothing to confirm on an ion without a formula', async () => {
    expect((await refusalOf(decide(confirm(tree.unknown)))).message).toMatch(/no proposed formula/);
  });
});

describe('two people on one claim', () => {
  it('tells the second who changed what and when, and saves nothing of theirs', async () => {
    await decideClaims(lead, tree.treeId, [confirm(tree.big)]);
    const error = await refusalOf(decide(confirm(tree.small), confirm(tree.big, { action: 'reject' })));
    expect(error.code).toBe('conflict');
    const { conflicts } = error.details as { conflicts: { ionId: number; who: string; action: string; at: string }[] };
    expect(conflicts).toMatchObject([{ ionId: tree.big, who: 'lead', action: 'confirmed', formula: 'C6H8N3O' }]);
    expect(Date.now() - Date.parse(conflicts[0].at)).toBeLessThan(60_000);
    expect(await ionNow(tree.small)).toMatchObject({ state: 'proposed', version: 1 });
  });

  it('lets exactly one of two simultaneous decisions through', async () => {
    const both = await Promise.allSettled([
      decide(confirm(tree.big)),
      decideClaims(lead, tree.treeId, [confirm(tree.big, { action: 'reject' })])
    ]);
    expect(both.map((r) => r.status).sort()).toEqual(['fulfilled', 'rejected']);
    expect((await ionNow(tree.big)).version).toBe(2);
    expect(await database().select().from(claimHistory).where(eq(claimHistory.ionId, tree.big))).toHaveLength(1);
  });
});

describe('all or nothing', () => {
  it('takes no decision when one of them cannot be taken', async () => {
    const error = await refusalOf(decide(confirm(tree.big), confirm(tree.small), confirm(tree.unknown)));
    expect(error.code).toBe('invalid');
    expect(await ionNow(tree.big)).toMatchObject({ state: 'proposed', version: 1, decidedBy: null });
    expect((await treeNow(tree.treeId)).version).toBe(1);
    expect(await database().select().from(claimHistory).where(eq(claimHistory.ionId, tree.big))).toHaveLength(0);
  });

  it('refuses two decisions on the same ion', async () => {
    expect(await codeOf(decide(confirm(tree.big), confirm(tree.big, { action: 'reject' })))).toBe('invalid');
  });
});

describe('undo', () => {
  it('restores the state before, with whoever had decided it', async () => {
    await decideClaims(lead, tree.treeId, [confirm(tree.big)]);
    await decide(confirm(tree.big, { version: 2, action: 'reject', reason: 'no' }));
    await decide(confirm(tree.big, { version: 3, action: 'undo' }));
    expect(await ionNow(tree.big)).toMatchObject({ state: 'confirmed', decidedBy: lead.id, reason: null, version: 4 });
    await decide(confirm(tree.big, { version: 4, action: 'undo' }));
    expect(await ionNow(tree.big)).toMatchObject({ state: 'proposed', decidedBy: null, formula: 'C6H8N3O' });
    expect(await codeOf(decide(confirm(tree.big, { version: 5, action: 'undo' })))).toBe('invalid');
  });

  it('brings formula, loss and score of an ion left open back', async () => {
    await decide(confirm(tree.small, { action: 'open', reason: 'weak' }));
    await decide(confirm(tree.small, { version: 2, action: 'undo' }));
    expect(await ionNow(tree.small)).toMatchObject({
      state: 'proposed',
      formula: 'C5H8N3',
      loss: 'CO',
      link: 'inferred',
      score: 3
    });
  });
});

describe('ions that hang on a changed formula', () => {
  it('get their loss worked out again, in the same spectrum and in the one it opened, and back by undo', async () => {
    await database().update(trees).set({ settings: wide() }).where(eq(trees.id, tree.treeId));
    // C7H8NO2+ is m/z 138.0550, 11 mDa from C6H8N3O+: within five windows of 5 mDa.
    const { ions } = await decide(confirm(tree.big, { formula: 'C7H8NO2' }));
    expect(ions.map((ion) => ion.id).sort()).toEqual([tree.big, tree.small, tree.stage3].sort());
    // C5H8N3 is no part of C7H8NO2: the claim stays, its link goes.
    expect(await ionNow(tree.stage3)).toMatchObject({ formula: 'C5H8N3', loss: null, link: null, version: 2 });
    await decide(confirm(tree.big, { version: 2, action: 'undo' }));
    expect(await ionNow(tree.stage3)).toMatchObject({ loss: 'CO', link: 'measured', fromFormula: 'C6H8N3O' });
    expect(await ionNow(tree.small)).toMatchObject({ loss: 'CO', link: 'inferred' });
  });
  const wide = () => ({ elements: null, adducts: [], tolerance: { ppm: 0, mda: 5 }, separateEnergies: false });
});

describe('who may decide', () => {
  it('lets lead and annotator, nobody else', async () => {
    const as = (person: TestPerson | null) => codeOf(decideClaims(person, tree.treeId, [confirm(tree.big)]));
    expect(await as(null)).toBe('unauthenticated');
    expect(await as(reviewer)).toBe('forbidden');
    expect(await as(guest)).toBe('not-found');
    expect(await as(outsider)).toBe('not-found');
    expect(await as(lead)).toBe('no error');
  });

  it('does not reach ions of another tree through its own', async () => {
    const other = await makeCaffeineTree(study);
    expect(await codeOf(decide(confirm(other.big)))).toBe('not-found');
    expect(await codeOf(decide(confirm(tree.big), confirm(other.big)))).toBe('not-found');
    expect(await ionNow(other.big)).toMatchObject({ state: 'proposed', version: 1 });
    expect(await ionNow(tree.big)).toMatchObject({ state: 'proposed', version: 1 });
  });

  it('makes an approved tree a draft again', async () => {
    await database().update(trees).set({ status: 'approved' }).where(eq(trees.id, tree.treeId));
    expect((await decide(confirm(tree.big))).status).toBe('draft');
  });
});
