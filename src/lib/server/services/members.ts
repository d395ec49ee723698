import { and, asc, eq, inArray, isNull } from 'drizzle-orm';
import type { Role } from '$lib/schema/group';
import type { MemberChange } from '$lib/schema/member';
import { requireGroup, type Actor } from '../auth/authorize';
import { requirePerson } from '../auth/person';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { mailTokens, memberships, studies, studyGuests, users } from '../db/schema';
import { ServiceError } from '../errors';
import { audit } from './audit';
import { requireStudiesOfGroup, setGuestStudies } from './guest-studies';

export interface MemberView {
  userId: string;
  name: string;
  email: string;
  role: Role;
  since: Date;
  /** for a guest: the studies opened to them */
  studyIds: string[];
}

const ORDER: Record<Role, number> = { lead: 0, reviewer: 1, annotator: 2, guest: 3 };

/** Members of the group, leads first, guests last. @throws ServiceError as requireGroup */
export async function listMembers(actor: Actor | null, groupId: string): Promise<MemberView[]> {
  await requireGroup(actor, groupId, 'group.read');
  const rows = await database()
    .select({
      userId: users.id,
      name: users.name,
      email: users.email,
      role: memberships.role,
      since: memberships.createdAt
    })
    .from(memberships)
    .innerJoin(users, eq(users.id, memberships.userId))
    .where(eq(memberships.groupId, groupId))
    .orderBy(asc(users.name));
  const opened = await database()
    .select({ userId: studyGuests.userId, studyId: studyGuests.studyId })
    .from(studyGuests)
    .innerJoin(studies, eq(studies.id, studyGuests.studyId))
    .where(eq(studies.groupId, groupId));
  const studyIds = (member: { userId: string; role: Role }) =>
    member.role === 'guest' ? opened.filter((o) => o.userId === member.userId).map((o) => o.studyId) : [];
  return rows.map((row) => ({ ...row, studyIds: studyIds(row) })).sort((a, b) => ORDER[a.role] - ORDER[b.role]);
}

/** Studies of the group by name, to choose from for a guest. @throws ServiceError as requireGroup */
export async function studiesToOpen(actor: Actor | null, groupId: string): Promise<{ id: string; name: string }[]> {
  await requireGroup(actor, groupId, 'member.manage');
  return database()
    .select({ id: studies.id, name: studies.name })
    .from(studies)
    .where(eq(studies.groupId, groupId))
    .orderBy(asc(studies.name));
}

/** Locks the group's memberships, so that two leads cannot step down at the same moment. @throws ServiceError not-found */
async function lockMember(tx: Executor, groupId: string, userId: string) {
  const all = await tx.select().from(memberships).where(eq(memberships.groupId, groupId)).for('update');
  const member = all.find((row) => row.userId === userId);
  if (!member)
    throw new ServiceError('not-found', 'This person is not a member of the group.', 'Reload the page to see who is.');
  const [{ name }] = await tx.select({ name: users.name }).from(users).where(eq(users.id, userId));
  return { ...member, name, lastLead: member.role === 'lead' && all.filter((row) => row.role === 'lead').length === 1 };
}

function keepALead(member: { lastLead: boolean }): void {
  if (member.lastLead)
    throw new ServiceError(
      'conflict',
      'A group needs at least one lead, and this is the last one.',
      'Make somebody else a lead first.'
    );
}

/** Invitations stand on the authority of who sent them. */
const withdrawInvitationsBy = (tx: Executor, groupId: string, userId: string) =>
  tx
    .update(mailTokens)
    .set({ revoked: true })
    .where(
      and(
        eq(mailTokens.groupId, groupId),
        eq(mailTokens.createdBy, userId),
        eq(mailTokens.kind, 'invitation'),
        isNull(mailTokens.usedAt)
      )
    );

/**
 * Gives a member a role and, for a guest, the studies opened to them.
 * @throws ServiceError conflict for the last lead, not-found for strangers and foreign studies, and as requireGroup
 */
export async function changeMember(actor: Actor | null, groupId: string, input: MemberChange): Promise<void> {
  await requireGroup(actor, groupId, 'member.manage');
  const studyIds = input.role === 'guest' ? input.studyIds : [];
  await database().transaction(async (tx) => {
    const member = await lockMember(tx, groupId, input.userId);
    if (input.role !== 'lead') keepALead(member);
    await requireStudiesOfGroup(tx, groupId, studyIds);
    await tx
      .update(memberships)
      .set({ role: input.role })
      .where(and(eq(memberships.groupId, groupId), eq(memberships.userId, input.userId)));
    await setGuestStudies(tx, groupId, input.userId, studyIds);
    if (member.role === 'lead' && input.role !== 'lead') await withdrawInvitationsBy(tx, groupId, input.userId);
    await audit(tx, actor, {
      groupId,
      action: member.role === input.role ? 'member.studies-opened' : 'member.role-changed',
      subjectKind: 'user',
      subjectId: input.userId,
      details: { name: member.name, from: member.role, to: input.role, studies: new Set(studyIds).size }
    });
  });
}

async function takeOut(
  groupId: string,
  userId: string,
  by: Actor,
  action: 'member.removed' | 'member.left'
): Promise<void> {
  await database().transaction(async (tx) => {
    const member = await lockMember(tx, groupId, userId);
    keepALead(member);
    const ofGroup = tx.select({ id: studies.id }).from(studies).where(eq(studies.groupId, groupId));
    await tx.delete(studyGuests).where(and(eq(studyGuests.userId, userId), inArray(studyGuests.studyId, ofGroup)));
    await tx.delete(memberships).where(and(eq(memberships.groupId, groupId), eq(memberships.userId, userId)));
    await withdrawInvitationsBy(tx, groupId, userId);
    await audit(tx, by, {
      groupId,
      action,
      subjectKind: 'user',
      subjectId: userId,
      details: { name: member.name, role: member.role }
    });
  });
}

/** Takes somebody out of the group; what they wrote stays. @throws ServiceError conflict for the last lead, and as requireGroup */
export async function removeMember(actor: Actor | null, groupId: string, userId: string): Promise<void> {
  await requireGroup(actor, groupId, 'member.manage');
  await takeOut(groupId, userId, requirePerson(actor), 'member.removed');
}

/** Leaves a group oneself, in any role. @throws ServiceError unauthenticated, conflict for the last lead, not-found */
export async function leaveGroup(actor: Actor | null, groupId: string): Promise<void> {
  const person = requirePerson(actor);
  await takeOut(groupId, person.id, person, 'member.left');
}
