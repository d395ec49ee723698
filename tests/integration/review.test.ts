import { eq } from 'drizzle-orm';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { canonicalJson } from '$lib/review/canonical';
import { closeDatabase, database } from '$lib/server/db';
import { auditLog, revisions } from '$lib/server/db/schema';
import { decideClaims } from '$lib/server/services/claims';
import { resolveThread, writeRemark } from '$lib/server/services/remarks';
import { reviewPage } from '$lib/server/services/review-page';
import { reviewQueue } from '$lib/server/services/review-queue';
import { sha256 } from '$lib/server/services/revision-content';
import { askForReview, withdrawRevision } from '$lib/server/services/revisions';
import { giveVerdict } from '$lib/server/services/verdicts';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf, queuedMails } from '../helpers/people';
import { ionAt, makeReviewWorld, makeTree, setApprovalsNeeded, treeRow, type ReviewWorld } from './review-fixture';

let db: TestDatabase;
let world: ReviewWorld;
let treeId: string;

beforeAll(async () => {
  db = await openTestDatabase();
  world = await makeReviewWorld();
});
beforeEach(async () => {
  treeId = await makeTree(world.studyId, world.annotator);
});
afterAll(async () => {
  await closeDatabase();
  await db?.close();
});

const ask = async (reviewers = [world.reviewer], message = '', by = world.annotator) =>
  askForReview(by, treeId, {
    ...{ reviewers: reviewers.map((person) => person.id), message },
    treeVersion: (await treeRow(treeId)).version
  });
const approve = (who: { id: string; name: string }, { number, hash }: { number: number; hash: string }) =>
  giveVerdict(who, treeId, { verdict: 'approve', reason: '', revision: number, hash });
const refuse = (
  who: { id: string; name: string },
  { number, hash }: { number: number; hash: string },
  reason: string
) => giveVerdict(who, treeId, { verdict: 'ask-for-changes', reason, revision: number, hash });
const stored = async (number: number) => {
  const rows = await database().select().from(revisions).where(eq(revisions.treeId, treeId));
  return rows.find((row) => row.number === number)!;
};
const change = async () => {
  const ion = await ionAt(treeId, 1, 0);
  return decideClaims(world.annotator, treeId, [{ ionId: ion.id, version: ion.version, action: 'confirm' }]);
};
const see = (who: { id: string; name: string }, revision?: number) =>
  reviewPage(who, treeId, world.studyId, { revision });

describe('the way through review', () => {
  it('goes from a draft over changes asked to an approval bound to the second revision', async () => {
    const first = await ask([world.reviewer], 'Please look at m/z 110.');
    expect((await treeRow(treeId)).status).toBe('in-review');
    const [mail] = (await queuedMails(world.reviewer.email)).slice(-1);
    expect(mail.subject).toContain('revision 1');
    expect(mail.text).toContain('Please look at m/z 110.');
    expect(mail.text).toContain(`/studies/${world.studyId}/trees/${treeId}/review?revision=1`);
    expect((await reviewQueue(world.reviewer)).toReview.filter((item) => item.treeId === treeId)).toMatchObject([
      { tree: 'Unknown A', revision: 1, who: 'annotator', text: 'Please look at m/z 110.' }
    ]);

    await refuse(world.reviewer, first, 'Confirm the loss of CO.');
    expect((await treeRow(treeId)).status).toBe('changes-asked');
    expect((await reviewQueue(world.reviewer)).toReview.some((item) => item.treeId === treeId)).toBe(false);
    expect((await reviewQueue(world.annotator)).changesAsked.find((item) => item.treeId === treeId)).toMatchObject({
      ...{ who: 'reviewer', text: 'Confirm the loss of CO.' }
    });
    expect((await queuedMails(world.annotator.email)).at(-1)?.text).toContain('Confirm the loss of CO.');

    await change();
    const second = await ask();
    expect(second.number).toBe(2);
    expect((await reviewQueue(world.annotator)).changesAsked.some((item) => item.treeId === treeId)).toBe(false);
    expect(await approve(world.reviewer, second)).toEqual({ status: 'approved' });
    expect((await stored(2)).status).toBe('approved');
    const acts = await database().select().from(auditLog).where(eq(auditLog.groupId, world.groupId));
    expect(acts.filter((a) => (a.details as { treeId?: string }).treeId === treeId).map((a) => a.action)).toEqual([
      ...['revision.review-asked', 'revision.changes-asked', 'claim.confirmed', 'revision.review-asked'],
      ...['revision.approval-given', 'revision.approved']
    ]);
  });

  it('makes a draft of an approved tree that changes, and keeps what was approved readable', async () => {
    const revision = await ask();
    await approve(world.reviewer, revision);
    await change();
    expect((await treeRow(treeId)).status).toBe('draft');
    const page = await see(world.guest);
    expect(page.shown).toMatchObject({ number: 1, status: 'approved', hash: revision.hash });
    const frozen = JSON.parse((await stored(1)).content) as { ions: { state: string; spectrum: number; mz: number }[] };
    expect(frozen.ions.find((ion) => ion.spectrum === 1)?.state).toBe('proposed');
  });

  it('leaves a tree that was edited during review a draft, with the frozen revision approved', async () => {
    const revision = await ask();
    await change();
    expect(await approve(world.reviewer, revision)).toEqual({ status: 'draft' });
    expect((await stored(1)).status).toBe('approved');
  });

  it('supersedes an open revision, and refuses a verdict on the old one with the reason', async () => {
    const old = await ask();
    const fresh = await ask([world.reviewer, world.second]);
    expect((await stored(1)).status).toBe('superseded');
    expect(await codeOf(approve(world.reviewer, old))).toBe('conflict');
    await expect(approve(world.reviewer, old)).rejects.toThrow(/superseded by revision 2/);
    expect((await stored(2)).status).toBe('in-review');
    expect(await approve(world.second, fresh)).toEqual({ status: 'approved' });
  });

  it('refuses a verdict on other content than the one looked at', async () => {
    const revision = await ask();
    expect(await codeOf(approve(world.reviewer, { ...revision, hash: '0'.repeat(64) }))).toBe('conflict');
  });

  it('refuses to freeze a tree that changed since the person looked', async () => {
    const { version } = await treeRow(treeId);
    await change();
    const stale = askForReview(world.annotator, treeId, {
      ...{ reviewers: [world.reviewer.id], message: '', treeVersion: version }
    });
    expect(await codeOf(stale)).toBe('conflict');
  });

  it('takes a revision back, by its author alone', async () => {
    const revision = await ask();
    expect(await codeOf(withdrawRevision(world.lead, treeId, revision.number))).toBe('forbidden');
    await withdrawRevision(world.annotator, treeId, revision.number);
    expect((await treeRow(treeId)).status).toBe('draft');
    expect(await codeOf(approve(world.reviewer, revision))).toBe('conflict');
  });

  it('waits for as many approvals as the group asks for', async () => {
    await setApprovalsNeeded(world.groupId, 2);
    try {
      expect(await codeOf(ask([world.reviewer]))).toBe('invalid');
      const revision = await ask([world.reviewer, world.second]);
      expect(await approve(world.reviewer, revision)).toEqual({ status: 'in-review' });
      expect(await codeOf(approve(world.reviewer, revision))).toBe('conflict');
      expect(await approve(world.second, revision)).toEqual({ status: 'approved' });
    } finally {
      await setApprovalsNeeded(world.groupId, 1);
    }
  });

  it('lets only one of two verdicts at the same moment settle a revision', async () => {
    const revision = await ask([world.reviewer, world.second]);
    const both = [codeOf(approve(world.reviewer, revision)), codeOf(refuse(world.second, revision, 'Not yet.'))];
    expect((await Promise.all(both)).sort()).toEqual(['conflict', 'no error']);
  });
});

describe('who may do what', () => {
  it('keeps authors from judging their own revision, and others from judging unasked', async () => {
    const byLead = await ask([world.reviewer], '', world.lead);
    expect(await codeOf(approve(world.lead, byLead))).toBe('forbidden');
    expect(await codeOf(approve(world.second, byLead))).toBe('forbidden');
  });

  it('takes reviewers from the group, with a role that decides', async () => {
    for (const person of [world.guest, world.stranger, world.annotator])
      expect(await codeOf(ask([person]))).toBe('invalid');
  });

  it('is closed to other roles, other groups and strangers', async () => {
    const revision = await ask();
    const { annotator, reviewer, guest, otherGuest, stranger } = world;
    const version = (await treeRow(treeId)).version;
    const request = { reviewers: [world.lead.id], message: '', treeVersion: version };
    expect(await codeOf(askForReview(reviewer, treeId, request))).toBe('forbidden');
    expect(await codeOf(askForReview(guest, treeId, request))).toBe('forbidden');
    expect(await codeOf(approve(annotator, revision))).toBe('forbidden');
    expect(await codeOf(approve(guest, revision))).toBe('forbidden');
    for (const [who, code] of [
      [otherGuest, 'not-found'],
      [stranger, 'not-found'],
      [null, 'unauthenticated']
    ] as const) {
      expect(await codeOf(askForReview(who, treeId, request))).toBe(code);
      expect(await codeOf(withdrawRevision(who, treeId, 1))).toBe(code);
      expect(await codeOf(reviewPage(who, treeId, world.studyId, {}))).toBe(code);
    }
  });

  it('shows guests approved revisions alone, without remarks and check list', async () => {
    await writeRemark(world.reviewer, treeId, { anchor: 'tree', body: 'Inside.' });
    const revision = await ask();
    expect(await see(world.guest)).toMatchObject({ revisions: [], shown: null, threads: [], checks: [] });
    expect(await codeOf(see(world.guest, 1))).toBe('not-found');
    await approve(world.reviewer, revision);
    expect((await see(world.guest)).revisions.map((r) => r.number)).toEqual([1]);
  });

  it('refuses the address of a tree under another study', async () => {
    expect(await codeOf(reviewPage(world.lead, treeId, crypto.randomUUID(), {}))).toBe('not-found');
  });
});

describe('a frozen revision', () => {
  it('is canonical and named by the SHA-256 of its text', async () => {
    const { hash } = await ask();
    const { content, hash: kept } = await stored(1);
    expect([sha256(content), kept]).toEqual([hash, hash]);
    expect(canonicalJson(JSON.parse(content))).toBe(content);
  });

  it('gives the same content again while nothing changes, and another one after a change', async () => {
    const first = await ask();
    const second = await ask();
    expect(second.hash).toBe(first.hash);
    await change();
    expect((await ask()).hash).not.toBe(first.hash);
  });

  it('cannot be changed in the database', async () => {
    await ask();
    const tampered = database().update(revisions).set({ content: '{}' }).where(eq(revisions.treeId, treeId));
    await expect(tampered.catch((e: { cause: Error }) => Promise.reject(e.cause))).rejects.toThrow(/frozen/);
  });
});

describe('the review screen', () => {
  it('shows what changed since the revision that this person last opened', async () => {
    await ask();
    expect((await see(world.reviewer)).changes).toBeNull();
    const { id } = await writeRemark(world.reviewer, treeId, { anchor: 'tree', body: 'Which column?' });
    await ask();
    await see(world.second);
    await change();
    await resolveThread(world.reviewer, id, true);
    await ask();
    const ion = await ionAt(treeId, 1, 0);
    const changed = [{ ionId: ion.id, kind: 'state', before: { state: 'proposed' }, after: { state: 'confirmed' } }];
    const mine = await see(world.reviewer);
    expect(mine.changes).toMatchObject({ since: 1, ions: changed, remarksClosed: [] });
    expect((await see(world.second)).changes).toMatchObject({ since: 2, ions: changed, remarksClosed: [{ id }] });
    expect((await see(world.reviewer)).changes?.since).toBe(1);
  });

  it('offers each role what it may do now', async () => {
    expect((await see(world.annotator)).can).toMatchObject({ ask: true, approve: false, withdraw: false });
    await ask();
    expect((await see(world.annotator)).can).toMatchObject({ ask: true, approve: false, withdraw: true });
    expect((await see(world.reviewer)).can).toMatchObject({ ask: false, approve: true, whyNot: null });
    expect((await see(world.lead)).can).toMatchObject({ approve: false, whyNot: 'not-asked' });
    expect((await see(world.guest)).can).toMatchObject({ ask: false, approve: false, remark: false });
  });

  it('computes the check list from the frozen tree', async () => {
    await ask();
    const { checks } = await see(world.reviewer);
    const ion = await ionAt(treeId, 0, 0);
    expect(checks.find((c) => c.key === 'unexplained')).toMatchObject({
      level: 'look',
      ions: [{ id: ion.id, relative: 9 }]
    });
  });
});
