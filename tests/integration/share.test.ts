import { eq } from 'drizzle-orm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { closeDatabase, database } from '$lib/server/db';
import { auditLog, shareLinks, trees } from '$lib/server/db/schema';
import { decideClaims } from '$lib/server/services/claims';
import { writeRemark } from '$lib/server/services/remarks';
import { askForReview } from '$lib/server/services/revisions';
import { listShareLinks, openShared, revokeShareLink, shareStudy, shareTree } from '$lib/server/services/share';
import { giveVerdict } from '$lib/server/services/verdicts';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf, makeStudy } from '../helpers/people';
import { ionAt, makeReviewWorld, makeTree, treeRow, type ReviewWorld } from './review-fixture';

let db: TestDatabase;
let world: ReviewWorld;
let approved: string;
let draft: string;
let hash: string;

beforeAll(async () => {
  db = await openTestDatabase();
  world = await makeReviewWorld();
  draft = await makeTree(world.studyId, world.annotator, 'Unknown A');
  approved = await makeTree(world.studyId, world.annotator, 'Unknown B');
  await writeRemark(world.reviewer, approved, { anchor: 'tree', body: 'Not for outsiders.' });
  const { version: treeVersion } = await treeRow(approved);
  const request = { reviewers: [world.reviewer.id], message: '', treeVersion };
  const { number: revision, hash: frozen } = await askForReview(world.annotator, approved, request);
  await giveVerdict(world.reviewer, approved, { verdict: 'approve', reason: '', revision, hash: frozen });
  hash = frozen;
});
afterAll(async () => {
  await closeDatabase();
  await db?.close();
});

const secretOf = ({ url }: { url: string }) => url.slice(url.lastIndexOf('/') + 1);
const open = (link: { url: string }, query = '') => openShared(secretOf(link), new URLSearchParams(query));
const expire = (id: string) =>
  database()
    .update(shareLinks)
    .set({ expiresAt: new Date(Date.now() - 1000) })
    .where(eq(shareLinks.id, id));

describe('a link to one approved tree', () => {
  it('shows the report of the approved revision without an account, and no remark', async () => {
    const link = await shareTree(world.lead, approved, world.studyId, 7);
    const view = await open(link);
    expect(view).toMatchObject({ kind: 'tree', back: false, report: { draft: false, source: { revision: 1, hash } } });
    expect(JSON.stringify(view)).not.toContain('Not for outsiders');
  });

  it('shows the approved revision still, when the tree has changed since', async () => {
    const link = await shareTree(world.lead, approved, world.studyId, 7);
    const ion = await ionAt(approved, 1, 0);
    await decideClaims(world.annotator, approved, [{ ionId: ion.id, version: ion.version, action: 'reject' }]);
    await database().update(trees).set({ name: 'Renamed draft' }).where(eq(trees.id, approved));
    expect(await open(link)).toMatchObject({ report: { title: 'Unknown B', source: { hash } } });
    expect(await open(link, 'revision=draft')).toMatchObject({ report: { draft: false } });
  });

  it('opens this tree only, whatever the query says', async () => {
    const link = await shareTree(world.lead, approved, world.studyId, 7);
    expect(await open(link, `tree=${draft}`)).toMatchObject({ report: { tree: { id: approved } } });
  });

  it('is not made for a tree that nobody approved', async () => {
    expect(await codeOf(shareTree(world.lead, draft, world.studyId, 7))).toBe('conflict');
  });

  it('holds a secret of 32 bytes that is stored as its hash alone', async () => {
    const link = await shareTree(world.lead, approved, world.studyId, 7);
    expect(secretOf(link)).toMatch(/^[A-Za-z0-9_-]{43}$/);
    const rows = await database().select().from(shareLinks);
    const log = await database().select().from(auditLog);
    expect(JSON.stringify([rows, log])).not.toContain(secretOf(link));
    expect(rows.some((row) => row.id === link.id)).toBe(true);
  });
});

describe('a link to a study', () => {
  it('lists its approved trees with their frozen facts, and opens those only', async () => {
    const link = await shareStudy(world.lead, world.studyId, 7);
    expect(await open(link)).toMatchObject({
      ...{ kind: 'study', study: 'Shore extracts' },
      trees: [{ id: approved, name: 'Unknown B', formula: 'C8H10N4O2', adduct: '[M+H]+', revision: 1 }]
    });
    expect(await open(link, `tree=${approved}`)).toMatchObject({
      kind: 'tree',
      back: true,
      report: { source: { hash } }
    });
    expect(await codeOf(open(link, `tree=${draft}`))).toBe('not-found');
  });

  it('opens no tree of another study', async () => {
    const link = await shareStudy(world.lead, await makeStudy(world.groupId, 'Another'), 7);
    expect(await open(link)).toMatchObject({ trees: [] });
    expect(await codeOf(open(link, `tree=${approved}`))).toBe('not-found');
  });
});

describe('the end of a link', () => {
  it('comes with its date', async () => {
    const link = await shareTree(world.lead, approved, world.studyId, 7);
    await expire(link.id);
    expect(await codeOf(open(link))).toBe('gone');
    expect((await listShareLinks(world.lead, world.studyId)).find((l) => l.id === link.id)?.state).toBe('expired');
  });

  it('comes at once when it is withdrawn, and withdrawing twice is one act', async () => {
    const link = await shareTree(world.lead, approved, world.studyId, 7);
    await revokeShareLink(world.lead, world.studyId, link.id);
    await revokeShareLink(world.lead, world.studyId, link.id);
    expect(await codeOf(open(link))).toBe('gone');
    const acts = await database().select().from(auditLog).where(eq(auditLog.subjectId, link.id));
    expect(acts.map((a) => a.action)).toEqual(['share-link.created', 'share-link.revoked']);
  });

  it('says the same to a guess as to an old link', async () => {
    const link = await shareTree(world.lead, approved, world.studyId, 7);
    await revokeShareLink(world.lead, world.studyId, link.id);
    const said = (secret: string) => openShared(secret, new URLSearchParams()).catch((e: Error) => e.message);
    const old = await said(secretOf(link));
    for (const guess of ['x', 'A'.repeat(43), '../../etc', link.id]) expect(await said(guess)).toBe(old);
  });
});

describe('who shares', () => {
  it('is the lead alone, in the own group', async () => {
    const link = await shareTree(world.lead, approved, world.studyId, 7);
    const { annotator, reviewer, guest, stranger, otherGuest } = world;
    for (const [who, code] of [
      ...[annotator, reviewer, guest].map((person) => [person, 'forbidden'] as const),
      ...[stranger, otherGuest].map((person) => [person, 'not-found'] as const),
      [null, 'unauthenticated'] as const
    ]) {
      expect(await codeOf(shareTree(who, approved, world.studyId, 7))).toBe(code);
      expect(await codeOf(shareStudy(who, world.studyId, 7))).toBe(code);
      expect(await codeOf(listShareLinks(who, world.studyId))).toBe(code);
      expect(await codeOf(revokeShareLink(who, world.studyId, link.id))).toBe(code);
    }
  });

  it('withdraws no link of another study', async () => {
    const link = await shareTree(world.lead, approved, world.studyId, 7);
    const other = await makeStudy(world.groupId, 'Another');
    expect(await codeOf(revokeShareLink(world.lead, other, link.id))).toBe('not-found');
    expect(await open(link)).toMatchObject({ kind: 'tree' });
  });
});
