import { and, desc, eq, gt, isNull } from 'drizzle-orm';
import type { Role } from '$lib/schema/group';
import type { NewInvitation } from '$lib/schema/member';
import { requireGroup, type Actor } from '../auth/authorize';
import { database } from '../db';
import { mailTokens, memberships, users } from '../db/schema';
import { ServiceError } from '../errors';
import { invitationMail, queueMail } from '../mail';
import { audit } from './audit';
import { requireStudiesOfGroup } from './guest-studies';
import { issueToken, tokenLink } from './mail-token';
import { countAct, RATE_RULES } from './rate-limit';

const SHOWN = 100;

export type InvitationState = 'open' | 'accepted' | 'withdrawn' | 'expired';
export interface InvitationView {
  /** stored hash of the secret; names the invitation in forms and opens nothing */
  id: string;
  email: string;
  role: Role;
  /** for a guest: the studies to be opened */
  studyIds: string[];
  state: InvitationState;
  invitedBy: string | null;
  createdAt: Date;
  expiresAt: Date;
}

function stateOf(token: typeof mailTokens.$inferSelect, now: Date): InvitationState {
  if (token.usedAt) return 'accepted';
  if (token.revoked) return 'withdrawn';
  return token.expiresAt > now ? 'open' : 'expired';
}

/** Invitations of the group, newest first. @throws ServiceError as requireGroup */
export async function listInvitations(actor: Actor | null, groupId: string): Promise<InvitationView[]> {
  await requireGroup(actor, groupId, 'member.manage');
  const rows = await database()
    .select({ token: mailTokens, invitedBy: users.name })
    .from(mailTokens)
    .leftJoin(users, eq(users.id, mailTokens.createdBy))
    .where(and(eq(mailTokens.groupId, groupId), eq(mailTokens.kind, 'invitation')))
    .orderBy(desc(mailTokens.createdAt))
    .limit(SHOWN);
  const now = new Date();
  return rows.map(({ token, invitedBy }) => ({
    id: token.id,
    email: token.email,
    role: token.role ?? 'guest',
    studyIds: token.studyIds ?? [],
    state: stateOf(token, now),
    invitedBy,
    createdAt: token.createdAt,
    expiresAt: token.expiresAt
  }));
}

async function refuseMember(groupId: string, email: string): Promise<void> {
  const [member] = await database()
    .select({ id: users.id })
    .from(users)
    .innerJoin(memberships, and(eq(memberships.userId, users.id), eq(memberships.groupId, groupId)))
    .where(eq(users.email, email));
  if (member)
    throw new ServiceError(
      'duplicate',
      `${email} is a member of this group already.`,
      'Change the role on the members page.',
      { field: 'email' }
    );
}

/**
 * Invites somebody by mail. A newer invitation to the same address replaces an open one, so this also sends again.
 * @throws ServiceError duplicate for a member, not-found for foreign studies, rate-limited, and as requireGroup
 */
export async function invite(actor: Actor | null, groupId: string, input: NewInvitation): Promise<void> {
  const { group } = await requireGroup(actor, groupId, 'member.manage');
  const by = actor as Actor;
  const studyIds = input.role === 'guest' ? [...new Set(input.studyIds)] : [];
  await refuseMember(groupId, input.email);
  await requireStudiesOfGroup(database(), groupId, studyIds);
  await countAct(RATE_RULES.invitationGroup, groupId);
  await database().transaction(async (tx) => {
    await tx
      .update(mailTokens)
      .set({ revoked: true })
      .where(
        and(
          eq(mailTokens.groupId, groupId),
          eq(mailTokens.kind, 'invitation'),
          eq(mailTokens.email, input.email),
          isNull(mailTokens.usedAt)
        )
      );
    const { secret, id, expiresAt } = await issueToken(tx, {
      kind: 'invitation',
      email: input.email,
      groupId,
      role: input.role,
      studyIds,
      createdBy: by.id
    });
    const link = tokenLink('invitation', secret);
    const message = invitationMail({ group: group.name, invitedBy: by.name, role: input.role, link, expiresAt });
    await queueMail(tx, { to: input.email, message, groupId, createdBy: by.id, notAfter: expiresAt });
    await audit(tx, by, {
      groupId,
      action: 'member.invited',
      subjectKind: 'group',
      subjectId: groupId,
      details: { email: input.email, role: input.role, invitation: id.slice(0, 12) }
    });
  });
}

/** Withdraws an open invitation. @throws ServiceError conflict when it is not open any more, and as requireGroup */
export async function withdrawInvitation(actor: Actor | null, groupId: string, id: string): Promise<void> {
  await requireGroup(actor, groupId, 'member.manage');
  const open = and(
    eq(mailTokens.id, id),
    eq(mailTokens.groupId, groupId),
    eq(mailTokens.kind, 'invitation'),
    isNull(mailTokens.usedAt),
    eq(mailTokens.revoked, false),
    gt(mailTokens.expiresAt, new Date())
  );
  await database().transaction(async (tx) => {
    const [token] = await tx.select({ email: mailTokens.email }).from(mailTokens).where(open).for('update');
    if (!token)
      throw new ServiceError('conflict', 'This invitation is not open any more.', 'Reload the page to see its state.');
    await tx.update(mailTokens).set({ revoked: true }).where(open);
    await audit(tx, actor, {
      groupId,
      action: 'member.invitation-withdrawn',
      subjectKind: 'group',
      subjectId: groupId,
      details: { email: token.email }
    });
  });
}
