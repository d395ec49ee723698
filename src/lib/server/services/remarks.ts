import { randomUUID } from 'node:crypto';
import { and, asc, eq, isNotNull, isNull } from 'drizzle-orm';
import { alias } from 'drizzle-orm/mysql-core';
import type { NewRemark, RemarkFilter, RemarkReply, RemarkThreadView } from '$lib/schema/review';
import { requireTree, requireUser, type Actor } from '../auth/authorize';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { ions, remarks, revisions, treeSpectra, users } from '../db/schema';
import { ServiceError } from '../errors';
import { audit } from './audit';

type RemarkRow = typeof remarks.$inferSelect;
const LEFT = 'somebody who left';

/** Threads of a tree, oldest first, with their replies. The caller has authorised; `readerId` marks the reader's own. */
export async function threadsOf(
  tx: Executor,
  treeId: string,
  readerId: string,
  filter: RemarkFilter = {}
): Promise<RemarkThreadView[]> {
  const author = alias(users, 'author');
  const resolver = alias(users, 'resolver');
  const rows = await tx
    .select({ remark: remarks, author: author.name, resolver: resolver.name, formula: ions.formula, loss: ions.loss })
    .from(remarks)
    .leftJoin(author, eq(author.id, remarks.authorId))
    .leftJoin(resolver, eq(resolver.id, remarks.resolvedBy))
    .leftJoin(ions, and(eq(ions.id, remarks.ionId), eq(ions.treeId, remarks.treeId)))
    .where(
      and(
        eq(remarks.treeId, treeId),
        isNull(remarks.threadId),
        filter.anchor === undefined ? undefined : eq(remarks.anchor, filter.anchor),
        filter.spectrum === undefined ? undefined : eq(remarks.spectrum, filter.spectrum),
        filter.ionId === undefined ? undefined : eq(remarks.ionId, filter.ionId),
        filter.open === undefined ? undefined : filter.open ? isNull(remarks.resolvedAt) : isNotNull(remarks.resolvedAt)
      )
    )
    .orderBy(asc(remarks.createdAt), asc(remarks.id));
  const replies = await tx
    .select({ remark: remarks, author: author.name })
    .from(remarks)
    .leftJoin(author, eq(author.id, remarks.authorId))
    .where(and(eq(remarks.treeId, treeId), isNotNull(remarks.threadId)))
    .orderBy(asc(remarks.createdAt), asc(remarks.id));
  const written = (row: { remark: RemarkRow; author: string | null }): RemarkReply => ({
    id: row.remark.id,
    author: row.author ?? LEFT,
    mine: row.remark.authorId === readerId,
    body: row.remark.body,
    createdAt: row.remark.createdAt.toISOString()
  });
  return rows.map((row) => {
    const { anchor, spectrum, ionId, mz, revisionNumber, resolvedAt } = row.remark;
    return {
      ...written(row),
      ...{ anchor, spectrum, ionId, mz, revisionNumber },
      formula: row.formula,
      loss: row.loss,
      resolvedAt: resolvedAt?.toISOString() ?? null,
      resolvedBy: resolvedAt ? (row.resolver ?? LEFT) : null,
      replies: replies.filter((reply) => reply.remark.threadId === row.remark.id).map(written)
    };
  });
}

/** All threads of a tree that fit the filter. @throws ServiceError unauthenticated, not-found */
export async function listThreads(
  actor: Actor | null,
  treeId: string,
  filter: RemarkFilter
): Promise<RemarkThreadView[]> {
  await requireTree(actor, treeId, 'study.read');
  return threadsOf(database(), treeId, actor!.id, filter);
}

type Anchor = Pick<RemarkRow, 'anchor' | 'spectrum' | 'ionId' | 'mz'>;

/** The anchor with its facts, which must belong to the tree. @throws ServiceError not-found */
async function anchorOf(tx: Executor, treeId: string, input: NewRemark): Promise<Anchor> {
  if (input.anchor === 'tree') return { anchor: 'tree', spectrum: null, ionId: null, mz: null };
  if (input.anchor === 'spectrum') {
    const [spectrum] = await tx
      .select({ path: treeSpectra.path })
      .from(treeSpectra)
      .where(and(eq(treeSpectra.treeId, treeId), eq(treeSpectra.index, input.spectrum)));
    if (!spectrum) throw new ServiceError('not-found', 'The tree has no such spectrum.', 'Reload the tree.');
    return { anchor: 'spectrum', spectrum: input.spectrum, ionId: null, mz: spectrum.path.at(-1) ?? null };
  }
  const [ion] = await tx
    .select({ spectrum: ions.spectrum, mz: ions.mz, loss: ions.loss })
    .from(ions)
    .where(and(eq(ions.treeId, treeId), eq(ions.id, input.ionId)));
  if (!ion) throw new ServiceError('not-found', 'The tree has no such ion.', 'Reload the tree.');
  if (input.anchor === 'loss' && !ion.loss)
    throw new ServiceError(
      'invalid',
      `No loss leads to m/z ${ion.mz.toFixed(4)}.`,
      'Write the remark on the ion instead.'
    );
  return { anchor: input.anchor, spectrum: ion.spectrum, ionId: input.ionId, mz: ion.mz };
}

/** Number of the revision under review, null on a draft. */
async function openRevision(tx: Executor, treeId: string): Promise<number | null> {
  const [row] = await tx
    .select({ number: revisions.number })
    .from(revisions)
    .where(and(eq(revisions.treeId, treeId), eq(revisions.status, 'in-review')));
  return row?.number ?? null;
}

/** Opens a thread. @returns the remark's id @throws ServiceError unauthenticated, not-found, forbidden, invalid */
export async function writeRemark(actor: Actor | null, treeId: string, input: NewRemark): Promise<{ id: string }> {
  const { group } = await requireTree(actor, treeId, 'remark.write');
  const id = randomUUID();
  await database().transaction(async (tx) => {
    const anchor = await anchorOf(tx, treeId, input);
    const revisionNumber = await openRevision(tx, treeId);
    await tx.insert(remarks).values({ id, treeId, ...anchor, authorId: actor!.id, body: input.body, revisionNumber });
    await audit(tx, actor, {
      groupId: group.id,
      action: 'remark.written',
      subjectKind: 'remark',
      subjectId: id,
      details: { treeId, ...anchor }
    });
  });
  return { id };
}

async function remarkRow(actor: Actor | null, remarkId: string): Promise<RemarkRow> {
  requireUser(actor);
  const [row] = await database().select().from(remarks).where(eq(remarks.id, remarkId));
  if (!row)
    throw new ServiceError('not-found', 'There is no such remark, or it is not open to you.', 'Reload the tree.');
  return row;
}

/** Answers in the thread of a remark. @returns the reply's id @throws ServiceError unauthenticated, not-found, forbidden */
export async function replyTo(actor: Actor | null, remarkId: string, body: string): Promise<{ id: string }> {
  const row = await remarkRow(actor, remarkId);
  const { group } = await requireTree(actor, row.treeId, 'remark.write');
  const id = randomUUID();
  const { treeId, anchor, spectrum, ionId, mz } = row;
  await database().transaction(async (tx) => {
    await tx.insert(remarks).values({
      ...{ id, treeId, anchor, spectrum, ionId, mz, body },
      threadId: row.threadId ?? row.id,
      authorId: actor!.id,
      revisionNumber: await openRevision(tx, treeId)
    });
    await audit(tx, actor, {
      groupId: group.id,
      action: 'remark.answered',
      subjectKind: 'remark',
      subjectId: row.threadId ?? row.id,
      details: { treeId, reply: id }
    });
  });
  return { id };
}

/** Resolves or reopens the thread of a remark. Repeating it changes nothing. @throws ServiceError not-found, forbidden */
export async function resolveThread(actor: Actor | null, remarkId: string, resolved: boolean): Promise<void> {
  const row = await remarkRow(actor, remarkId);
  const { group } = await requireTree(actor, row.treeId, 'remark.resolve');
  const threadId = row.threadId ?? row.id;
  await database().transaction(async (tx) => {
    const [done] = await tx
      .update(remarks)
      .set({ resolvedAt: resolved ? new Date() : null, resolvedBy: resolved ? actor!.id : null })
      .where(and(eq(remarks.id, threadId), resolved ? isNull(remarks.resolvedAt) : isNotNull(remarks.resolvedAt)));
    if (!done.affectedRows) return;
    // Replies follow, so that "open" means the same for every row of a thread.
    await tx
      .update(remarks)
      .set({ resolvedAt: resolved ? new Date() : null, resolvedBy: resolved ? actor!.id : null })
      .where(eq(remarks.threadId, threadId));
    await audit(tx, actor, {
      groupId: group.id,
      action: resolved ? 'remark.resolved' : 'remark.reopened',
      subjectKind: 'remark',
      subjectId: threadId,
      details: { treeId: row.treeId }
    });
  });
}
