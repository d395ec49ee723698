import { randomUUID } from 'node:crypto';
import { and, eq, inArray } from 'drizzle-orm';
import type { Join } from '$lib/schema/account';
import type { Role } from '$lib/schema/group';
import type { Actor } from '../auth/authorize';
import { requirePerson } from '../auth/person';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { groups, memberships, studies, users } from '../db/schema';
import { ServiceError } from '../errors';
import { userByEmail } from './accounts';
import { audit } from './audit';
import { setGuestStudies } from './guest-studies';
import { readToken, useToken, type MailToken } from './mail-token';
import { hashPassword, requireGoodPassword } from './passwords';
import { startSession } from './sessions';

/** What the person with the link has to do: make an account, sign in, switch accounts, or only accept. */
export type InvitationStep = 'join' | 'sign-in' | 'other-account' | 'accept';

export interface InvitationOffer {
  groupId: string;
  group: string;
  role: Role;
  email: string;
  invitedBy: string | null;
  expiresAt: Date;
  step: InvitationStep;
}

function stepFor(email: string, viewer: { email: string } | null, hasAccount: boolean): InvitationStep {
  if (viewer) return viewer.email === email ? 'accept' : 'other-account';
  return hasAccount ? 'sign-in' : 'join';
}

/** What an invitation offers. Holding the secret is the permission. @throws ServiceError gone */
export async function readInvitation(secret: string, viewer: { email: string } | null): Promise<InvitationOffer> {
  const token = await readToken(database(), 'invitation', secret);
  const [group] = await database()
    .select()
    .from(groups)
    .where(eq(groups.id, token.groupId ?? ''));
  const [inviter] = await database()
    .select({ name: users.name })
    .from(users)
    .where(eq(users.id, token.createdBy ?? ''));
  const account = await userByEmail(database(), token.email);
  return {
    groupId: group.id,
    group: group.name,
    role: token.role ?? 'guest',
    email: token.email,
    invitedBy: inviter?.name ?? null,
    expiresAt: token.expiresAt,
    step: stepFor(token.email, viewer, account !== null)
  };
}

/** Makes the membership that an invitation offers; studies that went away in the meantime are passed over. */
async function enter(tx: Executor, token: MailToken, person: Actor): Promise<void> {
  const groupId = token.groupId ?? '';
  const role = token.role ?? 'guest';
  await tx.insert(memberships).values({ groupId, userId: person.id, role });
  if (role === 'guest' && token.studyIds?.length) {
    const still = await tx
      .select({ id: studies.id })
      .from(studies)
      .where(and(eq(studies.groupId, groupId), inArray(studies.id, token.studyIds)));
    const ids = still.map(({ id }) => id);
    await setGuestStudies(tx, groupId, person.id, ids);
  }
  await audit(tx, person, {
    groupId,
    action: 'member.joined',
    subjectKind: 'user',
    subjectId: person.id,
    details: { name: person.name, role }
  });
}

/**
 * Accepts an invitation by making an account for its address and signing in.
 * @returns the id of the new session
 * @throws ServiceError gone, invalid (details.field), conflict when the address has an account already
 */
export async function acceptAsNew(input: Omit<Join, 'again'>, userAgent: string): Promise<string> {
  const token = await readToken(database(), 'invitation', input.token);
  requireGoodPassword(input.password, token.email);
  const passwordHash = await hashPassword(input.password);
  const person = { id: randomUUID(), name: input.name };
  await database().transaction(async (tx) => {
    await useToken(tx, 'invitation', input.token);
    if (await userByEmail(tx, token.email))
      throw new ServiceError(
        'conflict',
        'There is an account with this address already.',
        'Sign in and open the link again.'
      );
    await tx.insert(users).values({ ...person, email: token.email, passwordHash });
    await enter(tx, token, person);
  });
  return startSession(person.id, userAgent);
}

/**
 * Accepts an invitation with the account one is signed in with; it must be the one of the invited address.
 * @returns the group's id
 * @throws ServiceError unauthenticated, gone, forbidden for another address, conflict for a member
 */
export async function acceptAsMember(actor: (Actor & { email: string }) | null, secret: string): Promise<string> {
  const person = requirePerson(actor);
  const token = await readToken(database(), 'invitation', secret);
  if (person.email !== token.email)
    throw new ServiceError(
      'forbidden',
      `This invitation is for ${token.email}; you are signed in as ${person.email}.`,
      'Sign out, then open the link again.'
    );
  const groupId = token.groupId ?? '';
  await database().transaction(async (tx) => {
    await useToken(tx, 'invitation', secret);
    const [member] = await tx
      .select()
      .from(memberships)
      .where(and(eq(memberships.groupId, groupId), eq(memberships.userId, person.id)));
    if (member)
      throw new ServiceError(
        'conflict',
        'You are a member of this group already.',
        'Open it from the list of your groups.'
      );
    await enter(tx, token, { id: person.id, name: person.name });
  });
  return groupId;
}
