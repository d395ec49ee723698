import { and, eq } from 'drizzle-orm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { closeDatabase, database } from '$lib/server/db';
import { auditLog } from '$lib/server/db/schema';
import { listThreads, replyTo, resolveThread, writeRemark } from '$lib/server/services/remarks';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf } from '../helpers/people';
import { ionAt, makeReviewWorld, makeTree, type ReviewWorld } from './review-fixture';

let db: TestDatabase;
let world: ReviewWorld;
let treeId: string;
let otherTree: string;

beforeAll(async () => {
  db = await openTestDatabase();
  world = await makeReviewWorld();
  treeId = await makeTree(world.studyId, world.annotator);
  otherTree = await makeTree(world.studyId, world.annotator, 'Unknown B');
});
afterAll(async () => {
  await closeDatabase();
  await db?.close();
});

const acts = async (subjectId: string) =>
  (await database().select({ action: auditLog.action }).from(auditLog).where(eq(auditLog.subjectId, subjectId))).map(
    (row) => row.action
  );

describe('remarks', () => {
  it('are anchored at tree, spectrum, ion and loss, and found by their anchor', async () => {
    const ion = await ionAt(treeId, 1, 0);
    const { id: onTree } = await writeRemark(world.reviewer, treeId, { anchor: 'tree', body: 'Which batch?' });
    await writeRemark(world.reviewer, treeId, { anchor: 'spectrum', spectrum: 1, body: 'Only two scans.' });
    await writeRemark(world.lead, treeId, { anchor: 'ion', ionId: ion.id, body: 'C5H8N3 at 110.0712?' });
    await writeRemark(world.annotator, treeId, { anchor: 'loss', ionId: ion.id, body: 'CO or N2?' });
    const threads = await listThreads(world.guest, treeId, {});
    expect(threads.map((t) => [t.anchor, t.spectrum, t.ionId, t.author])).toEqual([
      ['tree', null, null, 'reviewer'],
      ['spectrum', 1, null, 'reviewer'],
      ['ion', 1, ion.id, 'lead'],
      ['loss', 1, ion.id, 'annotator']
    ]);
    expect(threads[2]).toMatchObject({ mz: ion.mz, formula: 'C5H8N3', loss: 'CO', mine: false });
    expect((await listThreads(world.lead, treeId, { anchor: 'ion', ionId: ion.id })).map((t) => t.mine)).toEqual([
      true
    ]);
    expect(await acts(onTree)).toEqual(['remark.written']);
  });

  it('are answered, resolved and reopened, each act on record', async () => {
    const { id } = await writeRemark(world.reviewer, treeId, { anchor: 'tree', body: 'Dated?' });
    const { id: reply } = await replyTo(world.annotator, id, 'Yes, in the run.');
    await replyTo(world.reviewer, reply, 'Thank you.');
    await resolveThread(world.reviewer, reply, true);
    await resolveThread(world.reviewer, id, true);
    let thread = (await listThreads(world.lead, treeId, { open: false })).find((t) => t.id === id);
    expect(thread).toMatchObject({
      resolvedBy: 'reviewer',
      replies: [{ author: 'annotator' }, { author: 'reviewer' }]
    });
    await resolveThread(world.annotator, id, false);
    thread = (await listThreads(world.lead, treeId, { open: true })).find((t) => t.id === id);
    expect(thread).toMatchObject({ resolvedAt: null, resolvedBy: null });
    expect(await acts(id)).toEqual([
      ...['remark.written', 'remark.answered', 'remark.answered', 'remark.resolved', 'remark.reopened']
    ]);
  });

  it('refuse an ion or spectrum of another tree, and a loss that is none', async () => {
    const foreign = await ionAt(otherTree, 1, 0);
    const lossless = await ionAt(treeId, 0, 0);
    const write = (input: Parameters<typeof writeRemark>[2]) => codeOf(writeRemark(world.annotator, treeId, input));
    expect(await write({ anchor: 'ion', ionId: foreign.id, body: 'x' })).toBe('not-found');
    expect(await write({ anchor: 'spectrum', spectrum: 9, body: 'x' })).toBe('not-found');
    expect(await write({ anchor: 'loss', ionId: lossless.id, body: 'x' })).toBe('invalid');
  });

  it('are closed to guests for writing, and to everybody outside for reading', async () => {
    const { id } = await writeRemark(world.reviewer, treeId, { anchor: 'tree', body: 'Inside only.' });
    const { guest, otherGuest, stranger } = world;
    for (const [who, code] of [
      [guest, 'forbidden'],
      [otherGuest, 'not-found'],
      [stranger, 'not-found'],
      [null, 'unauthenticated']
    ] as const) {
      expect(await codeOf(writeRemark(who, treeId, { anchor: 'tree', body: 'x' }))).toBe(code);
      expect(await codeOf(replyTo(who, id, 'x'))).toBe(code);
      expect(await codeOf(resolveThread(who, id, true))).toBe(code);
      if (who !== guest) expect(await codeOf(listThreads(who, treeId, {}))).toBe(code);
    }
    expect(await codeOf(replyTo(world.lead, 'no-such-remark', 'x'))).toBe('not-found');
  });
});

describe('the audit log', () => {
  it('refuses every change and every deletion of what was written', async () => {
    const message = (work: Promise<unknown>) =>
      work.then(
        () => 'no error',
        (error: { cause?: { message?: string } }) => error.cause?.message ?? ''
      );
    const written = and(eq(auditLog.action, 'remark.written'));
    expect(await message(database().update(auditLog).set({ actorName: 'x' }).where(written))).toMatch(/append-only/);
    expect(await message(database().delete(auditLog).where(written))).toMatch(/append-only/);
  });
});
