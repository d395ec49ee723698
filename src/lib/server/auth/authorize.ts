import { and, eq } from 'drizzle-orm';
import { may, type Action } from '$lib/review/permissions';
import type { Role } from '$lib/schema/group';
import { database } from '../db';
import { groups, memberships, runs, studies, studyGuests, trees } from '../db/schema';
import { ServiceError } from '../errors';

/** The signed-in person on whose behalf a service acts. */
export interface Actor {
  id: string;
  name: string;
}

export interface GroupAccess {
  group: typeof groups.$inferSelect;
  role: Role;
}
export interface StudyAccess extends GroupAccess {
  study: typeof studies.$inferSelect;
}
export interface RunAccess extends StudyAccess {
  run: typeof runs.$inferSelect;
}
export interface TreeAccess extends StudyAccess {
  tree: typeof trees.$inferSelect;
}

const nowhere = (what: string) =>
  new ServiceError(
    'not-found',
    `There is no such ${what}, or it is not open to you.`,
    'Check the address, or ask the lead of the group.'
  );

function permit(role: Role, action: Action): void {
  if (!may(role, action))
    throw new ServiceError(
      'forbidden',
      `Your role in this group (${role}) does not allow this.`,
      'Ask the lead of the group.'
    );
}

function signedIn(actor: Actor | null): asserts actor is Actor {
  if (!actor) throw new ServiceError('unauthenticated', 'You are not signed in.', 'Sign in and try again.');
}

/** For what any signed-in person may do, on their own behalf. @throws ServiceError unauthenticated */
export function requireUser<T extends Actor>(actor: T | null): T {
  signedIn(actor);
  return actor;
}

/** Guests see only the studies that were opened to them; for everybody else membership of the group suffices. */
async function opened(role: Role, studyId: string, userId: string): Promise<boolean> {
  if (role !== 'guest') return true;
  const rows = await database()
    .select({ studyId: studyGuests.studyId })
    .from(studyGuests)
    .where(and(eq(studyGuests.studyId, studyId), eq(studyGuests.userId, userId)));
  return rows.length > 0;
}

/** The group, if the person is a member and the role allows the action. @throws ServiceError unauthenticated, not-found, forbidden */
export async function requireGroup(actor: Actor | null, groupId: string, action: Action): Promise<GroupAccess> {
  signedIn(actor);
  const [row] = await database()
    .select({ group: groups, role: memberships.role })
    .from(groups)
    .innerJoin(memberships, and(eq(memberships.groupId, groups.id), eq(memberships.userId, actor.id)))
    .where(eq(groups.id, groupId));
  if (!row) throw nowhere('group');
  permit(row.role, action);
  return row;
}

/** The study with the person's role. @throws ServiceError unauthenticated, not-found, forbidden */
export async function requireStudy(actor: Actor | null, studyId: string, action: Action): Promise<StudyAccess> {
  signedIn(actor);
  const [row] = await database()
    .select({ study: studies, group: groups, role: memberships.role })
    .from(studies)
    .innerJoin(groups, eq(groups.id, studies.groupId))
    .innerJoin(memberships, and(eq(memberships.groupId, studies.groupId), eq(memberships.userId, actor.id)))
    .where(eq(studies.id, studyId));
  if (!row || !(await opened(row.role, studyId, actor.id))) throw nowhere('study');
  permit(row.role, action);
  return row;
}

/** The run; where a study id is given the run must belong to it. @throws ServiceError unauthenticated, not-found, forbidden */
export async function requireRun(
  actor: Actor | null,
  runId: string,
  action: Action,
  studyId?: string
): Promise<RunAccess> {
  signedIn(actor);
  const [row] = await database()
    .select({ run: runs, study: studies, group: groups, role: memberships.role })
    .from(runs)
    .innerJoin(studies, eq(studies.id, runs.studyId))
    .innerJoin(groups, eq(groups.id, studies.groupId))
    .innerJoin(memberships, and(eq(memberships.groupId, studies.groupId), eq(memberships.userId, actor.id)))
    .where(eq(runs.id, runId));
  if (!row || (studyId && row.study.id !== studyId) || !(await opened(row.role, row.study.id, actor.id)))
    throw nowhere('run');
  permit(row.role, action);
  return row;
}

/** The tree; where a study id is given the tree must belong to it. @throws ServiceError unauthenticated, not-found, forbidden */
export async function requireTree(
  actor: Actor | null,
  treeId: string,
  action: Action,
  studyId?: string
): Promise<TreeAccess> {
  signedIn(actor);
  const [row] = await database()
    .select({ tree: trees, study: studies, group: groups, role: memberships.role })
    .from(trees)
    .innerJoin(studies, eq(studies.id, trees.studyId))
    .innerJoin(groups, eq(groups.id, studies.groupId))
    .innerJoin(memberships, and(eq(memberships.groupId, studies.groupId), eq(memberships.userId, actor.id)))
    .where(eq(trees.id, treeId));
  if (!row || (studyId && row.study.id !== studyId) || !(await opened(row.role, row.study.id, actor.id)))
    throw nowhere('tree');
  permit(row.role, action);
  return row;
}
