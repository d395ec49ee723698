import { and, asc, eq, inArray, isNull, ne, sql } from 'drizzle-orm';
import type { Actor } from '../auth/authorize';
import { database } from '../db';
import { memberships, reviewRequests, revisions, studies, trees, users } from '../db/schema';

/** A tree under review, and who has not answered yet. */
export interface WaitingTree {
  treeId: string;
  tree: string;
  studyId: string;
  study: string;
  revision: number;
  since: Date;
  waitingFor: string[];
}

/**
 * What waits for others: open revisions that the person asked for, and, where they lead the group, all of the group's.
 * Longest waiting first.
 */
export async function waitingForOthers(actor: Actor): Promise<WaitingTree[]> {
  const rows = await database()
    .select({
      treeId: trees.id,
      tree: trees.name,
      studyId: studies.id,
      study: studies.name,
      revision: revisions.number,
      since: revisions.createdAt,
      who: users.name
    })
    .from(revisions)
    .innerJoin(trees, eq(trees.id, revisions.treeId))
    .innerJoin(studies, eq(studies.id, trees.studyId))
    .innerJoin(memberships, and(eq(memberships.groupId, studies.groupId), eq(memberships.userId, actor.id)))
    .innerJoin(reviewRequests, and(eq(reviewRequests.revisionId, revisions.id), isNull(reviewRequests.verdict)))
    .innerJoin(users, eq(users.id, reviewRequests.reviewerId))
    .where(
      and(
        eq(revisions.status, 'in-review'),
        inArray(memberships.role, ['annotator', 'lead']),
        sql`(${revisions.createdBy} = ${actor.id} or ${memberships.role} = 'lead')`,
        ne(reviewRequests.reviewerId, actor.id)
      )
    )
    .orderBy(asc(revisions.createdAt), asc(users.name))
    .limit(200);
  const found = new Map<string, WaitingTree>();
  for (const { who, ...row } of rows) {
    const known = found.get(row.treeId);
    if (known) known.waitingFor.push(who);
    else found.set(row.treeId, { ...row, waitingFor: [who] });
  }
  return [...found.values()];
}
