import { and, asc, eq, inArray, isNull, sql } from 'drizzle-orm';
import { alias } from 'drizzle-orm/mysql-core';
import { PERMISSIONS, type Action } from '$lib/review/permissions';
import { ROLES } from '$lib/schema/group';
import type { Actor } from '../auth/authorize';
import { database } from '../db';
import { memberships, reviewRequests, revisions, studies, trees, users } from '../db/schema';

/** One tree that waits for the person. */
export interface QueueItem {
  treeId: string;
  tree: string;
  precursorMz: number;
  formula: string | null;
  adduct: string | null;
  studyId: string;
  study: string;
  revision: number;
  /** who asks: the author of the revision, or the reviewer who wants changes. */
  who: string | null;
  /** message with the request, or reason of the reviewer. */
  text: string;
  since: string;
}

const rolesWith = (action: Action) => ROLES.filter((role) => PERMISSIONS[role].has(action));
const item = {
  treeId: trees.id,
  tree: trees.name,
  precursorMz: trees.precursorMz,
  formula: trees.formula,
  adduct: trees.adduct,
  studyId: studies.id,
  study: studies.name,
  revision: revisions.number
};
const plain = ({ since, text, ...row }: Omit<QueueItem, 'since' | 'text'> & { since: Date; text: string | null }) => ({
  ...row,
  text: text ?? '',
  since: since.toISOString()
});

/** Open revisions for which a verdict of this person is still missing, longest waiting first. */
async function verdictsWanted(actor: Actor): Promise<QueueItem[]> {
  const author = alias(users, 'author');
  const rows = await database()
    .select({ ...item, who: author.name, text: revisions.message, since: reviewRequests.createdAt })
    .from(reviewRequests)
    .innerJoin(revisions, eq(revisions.id, reviewRequests.revisionId))
    .innerJoin(trees, eq(trees.id, revisions.treeId))
    .innerJoin(studies, eq(studies.id, trees.studyId))
    .innerJoin(memberships, and(eq(memberships.groupId, studies.groupId), eq(memberships.userId, actor.id)))
    .leftJoin(author, eq(author.id, revisions.createdBy))
    .where(
      and(
        eq(reviewRequests.reviewerId, actor.id),
        isNull(reviewRequests.verdict),
        eq(revisions.status, 'in-review'),
        inArray(memberships.role, rolesWith('review.decide'))
      )
    )
    .orderBy(asc(reviewRequests.createdAt));
  return rows.map(plain);
}

/** Trees sent back to this person: the newest revision is theirs and a reviewer asked for changes. */
async function changesAsked(actor: Actor): Promise<QueueItem[]> {
  const reviewer = alias(users, 'reviewer');
  const rows = await database()
    .select({ ...item, who: reviewer.name, text: reviewRequests.reason, since: reviewRequests.decidedAt })
    .from(revisions)
    .innerJoin(trees, eq(trees.id, revisions.treeId))
    .innerJoin(studies, eq(studies.id, trees.studyId))
    .innerJoin(memberships, and(eq(memberships.groupId, studies.groupId), eq(memberships.userId, actor.id)))
    .innerJoin(
      reviewRequests,
      and(eq(reviewRequests.revisionId, revisions.id), eq(reviewRequests.verdict, 'ask-for-changes'))
    )
    .leftJoin(reviewer, eq(reviewer.id, reviewRequests.reviewerId))
    .where(
      and(
        eq(revisions.createdBy, actor.id),
        eq(revisions.status, 'changes-asked'),
        sql`${revisions.number} = (select max(r.number) from ${revisions} r where r.tree_id = ${revisions.treeId})`,
        inArray(memberships.role, rolesWith('review.request'))
      )
    )
    .orderBy(asc(reviewRequests.decidedAt));
  return rows.map(({ since, ...row }) => plain({ ...row, since: since ?? new Date(0) }));
}

/** What waits for the person over all groups: verdicts to give, and changes asked of them. */
export async function reviewQueue(actor: Actor): Promise<{ toReview: QueueItem[]; changesAsked: QueueItem[] }> {
  const [toReview, asked] = await Promise.all([verdictsWanted(actor), changesAsked(actor)]);
  return { toReview, changesAsked: asked };
}
