import { randomUUID } from 'node:crypto';
import { and, asc, desc, eq, inArray, ne } from 'drizzle-orm';
import { PERMISSIONS } from '$lib/review/permissions';
import type { RevisionContent } from '$lib/review/content';
import { ROLES } from '$lib/schema/group';
import type { AskForReview } from '$lib/schema/review';
import { requireTree, type Actor } from '../auth/authorize';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { memberships, reviewRequests, revisions, trees, users } from '../db/schema';
import { ServiceError } from '../errors';
import { audit } from './audit';
import { openSealed, revisionContent, sealed } from './revision-content';
import { mailReviewers } from './review-mail';
import { decideOn, lockReview } from './review-state';

export type RevisionRow = typeof revisions.$inferSelect;

/** Members who may give verdicts, without the person who asks. */
export async function possibleReviewers(tx: Executor, groupId: string, authorId: string) {
  const roles = ROLES.filter((role) => PERMISSIONS[role].has('review.decide'));
  return tx
    .select({ id: users.id, name: users.name, email: users.email, role: memberships.role })
    .from(memberships)
    .innerJoin(users, eq(users.id, memberships.userId))
    .where(and(eq(memberships.groupId, groupId), inArray(memberships.role, roles), ne(users.id, authorId)))
    .orderBy(asc(users.name));
}

/** What the list of revisions shows. */
export interface RevisionView {
  id: string;
  number: number;
  hash: string;
  status: RevisionRow['status'];
  treeVersion: number;
  message: string;
  author: { id: string; name: string } | null;
  createdAt: string;
  decidedAt: string | null;
  requests: {
    reviewerId: string;
    name: string;
    verdict: 'approve' | 'ask-for-changes' | null;
    reason: string | null;
    decidedAt: string | null;
  }[];
}

const listFields = {
  id: revisions.id,
  number: revisions.number,
  hash: revisions.hash,
  status: revisions.status,
  treeVersion: revisions.treeVersion,
  message: revisions.message,
  authorId: revisions.createdBy,
  author: users.name,
  createdAt: revisions.createdAt,
  decidedAt: revisions.decidedAt
};

/** All revisions of a tree, newest first, with the verdicts on each. The caller has authorised. */
export async function revisionsOf(tx: Executor, treeId: string): Promise<RevisionView[]> {
  const rows = await tx
    .select(listFields)
    .from(revisions)
    .leftJoin(users, eq(users.id, revisions.createdBy))
    .where(eq(revisions.treeId, treeId))
    .orderBy(desc(revisions.number));
  const requests = await tx
    .select({
      revisionId: reviewRequests.revisionId,
      reviewerId: reviewRequests.reviewerId,
      name: users.name,
      verdict: reviewRequests.verdict,
      reason: reviewRequests.reason,
      decidedAt: reviewRequests.decidedAt
    })
    .from(reviewRequests)
    .innerJoin(revisions, eq(revisions.id, reviewRequests.revisionId))
    .innerJoin(users, eq(users.id, reviewRequests.reviewerId))
    .where(eq(revisions.treeId, treeId))
    .orderBy(asc(users.name));
  return rows.map(({ authorId, author, createdAt, decidedAt, ...row }) => ({
    ...row,
    author: authorId && author ? { id: authorId, name: author } : null,
    createdAt: createdAt.toISOString(),
    decidedAt: decidedAt?.toISOString() ?? null,
    requests: requests
      .filter((request) => request.revisionId === row.id)
      .map(({ revisionId: _, ...request }) => ({ ...request, decidedAt: request.decidedAt?.toISOString() ?? null }))
  }));
}

/** The frozen content of one revision, checked against its hash; null when there is none of this number. */
export async function frozenContent(
  tx: Executor,
  treeId: string,
  number: number
): Promise<{ content: RevisionContent; text: string; hash: string } | null> {
  const [row] = await tx
    .select({ content: revisions.content, hash: revisions.hash })
    .from(revisions)
    .where(and(eq(revisions.treeId, treeId), eq(revisions.number, number)));
  return row ? { content: openSealed(row.content, row.hash), text: row.content, hash: row.hash } : null;
}

async function namedReviewers(tx: Executor, groupId: string, authorId: string, ids: readonly string[]) {
  const possible = await possibleReviewers(tx, groupId, authorId);
  const unknown = ids.find((id) => id !== authorId && !possible.some((person) => person.id === id));
  if (unknown)
    throw new ServiceError(
      'invalid',
      'One of the people named cannot review in this group.',
      'Name members with the role reviewer or lead.'
    );
  return possible.filter((person) => ids.includes(person.id));
}

/**
 * Freezes the tree as a new revision and asks named reviewers for a verdict; mail goes to each. An open revision is
 * superseded. @returns number and hash of the revision
 * @throws ServiceError forbidden, invalid (reviewers), conflict (tree changed since the person looked, nothing to review)
 */
export async function askForReview(actor: Actor | null, treeId: string, input: AskForReview, studyId?: string) {
  const { group, study } = await requireTree(actor, treeId, 'review.request', studyId);
  const author = actor!;
  return database().transaction(async (tx) => {
    const { tree, state, open } = await lockReview(tx, treeId, group);
    if (tree.version !== input.treeVersion)
      throw new ServiceError(
        'conflict',
        'The tree changed since you opened this page. Nothing was sent.',
        'Reload, look at the change, and ask again.'
      );
    const { approvalsNeeded } = group.defaults;
    const named = { reviewers: input.reviewers, approvalsNeeded };
    const events = decideOn({ type: 'ask-for-review', by: author.id, ...named }, state);
    const reviewers = await namedReviewers(tx, group.id, author.id, input.reviewers);
    if (open && events.some((event) => event.type === 'revision-superseded'))
      await tx.update(revisions).set({ status: 'superseded', decidedAt: new Date() }).where(eq(revisions.id, open.id));
    const id = randomUUID();
    const number = state.revision + 1;
    const { text, hash } = sealed(await revisionContent(tx, tree));
    const frozen = { id, treeId, number, treeVersion: tree.version, content: text, hash };
    await tx.insert(revisions).values({ ...frozen, status: 'in-review', message: input.message, createdBy: author.id });
    await tx
      .insert(reviewRequests)
      .values(reviewers.map((person) => ({ id: randomUUID(), revisionId: id, reviewerId: person.id })));
    await tx.update(trees).set({ status: 'in-review' }).where(eq(trees.id, treeId));
    await audit(tx, author, {
      groupId: group.id,
      action: 'revision.review-asked',
      subjectKind: 'revision',
      subjectId: id,
      details: {
        treeId,
        number,
        hash,
        reviewers: reviewers.map((person) => person.name),
        superseded: open?.number ?? null
      }
    });
    await mailReviewers(tx, { author, reviewers, tree, study, number, message: input.message });
    return { number, hash };
  });
}

/** Takes an open revision back; the tree is a draft again. @throws ServiceError forbidden, conflict */
export async function withdrawRevision(
  actor: Actor | null,
  treeId: string,
  number: number,
  studyId?: string
): Promise<void> {
  const { group } = await requireTree(actor, treeId, 'review.request', studyId);
  await database().transaction(async (tx) => {
    const { state, open } = await lockReview(tx, treeId, group);
    decideOn({ type: 'withdraw', by: actor!.id, revision: number }, state);
    await tx.update(revisions).set({ status: 'withdrawn', decidedAt: new Date() }).where(eq(revisions.id, open!.id));
    await tx.update(trees).set({ status: 'draft' }).where(eq(trees.id, treeId));
    await audit(tx, actor, {
      groupId: group.id,
      action: 'revision.withdrawn',
      subjectKind: 'revision',
      subjectId: open!.id,
      details: { treeId, number }
    });
  });
}
