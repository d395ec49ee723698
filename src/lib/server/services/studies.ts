import { and, asc, count, desc, eq, inArray, isNull, like, or, sql } from 'drizzle-orm';
import { randomUUID } from 'node:crypto';
import type { z } from 'zod';
import { may } from '$lib/review/permissions';
import type { editStudySchema, newStudySchema, TreeFilter } from '$lib/schema/study';
import { requireGroup, requireStudy, type Actor } from '../auth/authorize';
import { database } from '../db';
import type { Executor } from '../db/connection';
import {
  groups,
  memberships,
  remarks,
  reviewRequests,
  revisions,
  runs,
  studies,
  studyGuests,
  trees,
  users
} from '../db/schema';
import { ServiceError } from '../errors';
import { audit } from './audit';

/** The groups of a person with the role held in each, by name. */
export const groupsOf = (tx: Executor, userId: string) =>
  tx
    .select({ id: groups.id, name: groups.name, role: memberships.role })
    .from(memberships)
    .innerJoin(groups, eq(groups.id, memberships.groupId))
    .where(eq(memberships.userId, userId))
    .orderBy(asc(groups.name));

/** Studies open to the person over all groups, latest change first, with counts of runs and trees. */
export async function listStudies(actor: Actor, limit = 500) {
  const db = database();
  const opened = db.select({ id: studyGuests.studyId }).from(studyGuests).where(eq(studyGuests.userId, actor.id));
  return db
    .select({
      id: studies.id,
      name: studies.name,
      description: studies.description,
      updatedAt: studies.updatedAt,
      group: groups.name,
      groupId: groups.id,
      runs: sql<number>`(select count(*) from ${runs} where ${runs.studyId} = ${studies.id})`.mapWith(Number),
      trees: sql<number>`(select count(*) from ${trees} where ${trees.studyId} = ${studies.id})`.mapWith(Number),
      approved:
        sql<number>`(select count(*) from ${trees} where ${trees.studyId} = ${studies.id} and ${trees.status} = 'approved')`.mapWith(
          Number
        )
    })
    .from(studies)
    .innerJoin(groups, eq(groups.id, studies.groupId))
    .innerJoin(memberships, and(eq(memberships.groupId, groups.id), eq(memberships.userId, actor.id)))
    .where(or(sql`${memberships.role} <> 'guest'`, inArray(studies.id, opened)))
    .orderBy(desc(studies.updatedAt), asc(studies.id))
    .limit(limit);
}

/** Creates a study in a group. @throws ServiceError forbidden, not-found */
export async function createStudy(actor: Actor | null, input: z.infer<typeof newStudySchema>): Promise<string> {
  await requireGroup(actor, input.groupId, 'study.create');
  const id = randomUUID();
  await database().transaction(async (tx) => {
    await tx.insert(studies).values({
      id,
      groupId: input.groupId,
      name: input.name,
      description: input.description,
      createdBy: actor!.id,
      updatedAt: new Date()
    });
    await audit(tx, actor, {
      groupId: input.groupId,
      action: 'study.created',
      subjectKind: 'study',
      subjectId: id,
      details: { name: input.name }
    });
  });
  return id;
}

/** Renames or re-describes a study. @throws ServiceError conflict when a colleague changed it first */
export async function editStudy(actor: Actor | null, studyId: string, input: z.infer<typeof editStudySchema>) {
  const { group } = await requireStudy(actor, studyId, 'study.edit');
  await database().transaction(async (tx) => {
    const [done] = await tx
      .update(studies)
      .set({
        name: input.name,
        description: input.description,
        version: sql`${studies.version} + 1`,
        updatedAt: new Date()
      })
      .where(and(eq(studies.id, studyId), eq(studies.version, input.version)));
    if (!done.affectedRows)
      throw new ServiceError(
        'conflict',
        'A colleague changed this study first.',
        'Reload the page, look at the change, and save again.'
      );
    await audit(tx, actor, {
      groupId: group.id,
      action: 'study.edited',
      subjectKind: 'study',
      subjectId: studyId,
      details: { name: input.name }
    });
  });
}

/** Deletes an empty study; one with runs is refused so that no data goes by a slip. @throws ServiceError conflict */
export async function deleteStudy(actor: Actor | null, studyId: string): Promise<void> {
  const { group, study } = await requireStudy(actor, studyId, 'study.delete');
  await database().transaction(async (tx) => {
    const [{ n }] = await tx.select({ n: count() }).from(runs).where(eq(runs.studyId, studyId));
    if (n > 0)
      throw new ServiceError(
        'conflict',
        `The study still holds ${n} run${n === 1 ? '' : 's'}.`,
        'Delete its runs first.'
      );
    await tx.delete(studies).where(eq(studies.id, studyId));
    await audit(tx, actor, {
      groupId: group.id,
      action: 'study.deleted',
      subjectKind: 'study',
      subjectId: studyId,
      details: { name: study.name }
    });
  });
}

const ORDER = {
  updated: desc(trees.updatedAt),
  mz: asc(trees.precursorMz),
  explained: desc(trees.explained),
  name: asc(trees.name)
} as const;

/** The study's head: what the person may do there, and the counts of its tabs. @throws ServiceError not-found */
export async function studyHead(actor: Actor | null, studyId: string) {
  const { study, group, role } = await requireStudy(actor, studyId, 'study.read');
  const db = database();
  const [[treeCount], [runCount], members] = await Promise.all([
    db.select({ n: count() }).from(trees).where(eq(trees.studyId, studyId)),
    db.select({ n: count() }).from(runs).where(eq(runs.studyId, studyId)),
    studyMembers(group.id, studyId)
  ]);
  return {
    study: { id: study.id, name: study.name, description: study.description, version: study.version },
    group: { id: group.id, name: group.name },
    role,
    can: {
      edit: may(role, 'study.edit'),
      delete: may(role, 'study.delete'),
      upload: may(role, 'run.upload'),
      share: may(role, 'study.share'),
      manageMembers: may(role, 'member.manage')
    },
    counts: { trees: treeCount.n, runs: runCount.n, members: members.length },
    members
  };
}

/** Who can read the study: all members but guests, and the guests it was opened to. */
async function studyMembers(groupId: string, studyId: string) {
  const db = database();
  const opened = db.select({ id: studyGuests.userId }).from(studyGuests).where(eq(studyGuests.studyId, studyId));
  return db
    .select({ id: users.id, name: users.name, email: users.email, role: memberships.role })
    .from(memberships)
    .innerJoin(users, eq(users.id, memberships.userId))
    .where(and(eq(memberships.groupId, groupId), or(sql`${memberships.role} <> 'guest'`, inArray(users.id, opened))))
    .orderBy(asc(users.name));
}

/** The table of trees, filtered and sorted. @throws ServiceError not-found */
export async function listTrees(actor: Actor | null, studyId: string, filter: TreeFilter) {
  await requireStudy(actor, studyId, 'study.read');
  const db = database();
  const text = filter.text ? `%${filter.text.replace(/[\\%_]/g, '\\$&')}%` : null;
  const openRemarks = db
    .select({ treeId: remarks.treeId, n: count().as('n') })
    .from(remarks)
    .where(and(isNull(remarks.threadId), isNull(remarks.resolvedAt)))
    .groupBy(remarks.treeId)
    .as('open_remarks');
  const rows = await db
    .select({
      id: trees.id,
      name: trees.name,
      precursorMz: trees.precursorMz,
      adduct: trees.adduct,
      formula: trees.formula,
      explained: trees.explained,
      status: trees.status,
      updatedAt: trees.updatedAt,
      runId: runs.id,
      run: runs.fileName,
      suggestedAt: trees.suggestedAt,
      openRemarks: sql<number>`coalesce(${openRemarks.n}, 0)`.mapWith(Number)
    })
    .from(trees)
    .innerJoin(runs, eq(runs.id, trees.runId))
    .leftJoin(openRemarks, eq(openRemarks.treeId, trees.id))
    .where(
      and(
        eq(trees.studyId, studyId),
        filter.status ? eq(trees.status, filter.status) : undefined,
        filter.run ? eq(trees.runId, filter.run) : undefined,
        text
          ? or(like(trees.name, text), like(trees.formula, text), sql`cast(${trees.precursorMz} as char) like ${text}`)
          : undefined
      )
    )
    .orderBy(ORDER[filter.sort], asc(trees.id))
    .limit(5000);
  const reviewers = await reviewersOf(rows.map((row) => row.id));
  return rows.map((row) => ({ ...row, reviewers: reviewers.get(row.id) ?? [] }));
}

/** Names of the reviewers asked for the latest revision of each tree. */
async function reviewersOf(treeIds: string[]): Promise<Map<string, { name: string; verdict: string | null }[]>> {
  const found = new Map<string, { name: string; verdict: string | null }[]>();
  if (!treeIds.length) return found;
  const rows = await database()
    .select({ treeId: revisions.treeId, name: users.name, verdict: reviewRequests.verdict })
    .from(reviewRequests)
    .innerJoin(revisions, eq(revisions.id, reviewRequests.revisionId))
    .innerJoin(users, eq(users.id, reviewRequests.reviewerId))
    .where(
      and(
        inArray(revisions.treeId, treeIds),
        sql`${revisions.number} = (select max(r.number) from ${revisions} r where r.tree_id = ${revisions.treeId})`
      )
    )
    .orderBy(asc(users.name));
  for (const { treeId, ...who } of rows) found.set(treeId, [...(found.get(treeId) ?? []), who]);
  return found;
}
