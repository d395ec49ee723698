import { eq } from 'drizzle-orm';
import type { ChangePassword, SignIn } from '$lib/schema/account';
import type { Actor } from '../auth/authorize';
import { requirePerson } from '../auth/person';
import { config } from '../config';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { sessions, users } from '../db/schema';
import { ServiceError } from '../errors';
import { passwordChangedMail, queueMail } from '../mail';
import { audit } from './audit';
import { hashPassword, requireGoodPassword, verifyPassword } from './passwords';
import { clearActs, countAct, dropOldCounters, RATE_RULES, uncountAct } from './rate-limit';
import { startSession } from './sessions';

/** Where a request comes from: network address and User-Agent header. */
export interface RequestOrigin {
  address: string;
  userAgent: string;
}

type User = typeof users.$inferSelect;

/** The account of an address; `email` is the stored form, in lower case. */
export async function userByEmail(tx: Executor, email: string): Promise<User | null> {
  const [user] = await tx.select().from(users).where(eq(users.email, email));
  return user ?? null;
}

/**
 * Signs in. Open to strangers: it is what makes somebody known. Attempts are limited per account and per network
 * address; a successful one counts against neither.
 * @returns the id of a new session, for the cookie
 * @throws ServiceError invalid with the same words for a wrong password and an unknown account; rate-limited
 */
export async function signIn(input: SignIn, origin: RequestOrigin): Promise<string> {
  await countAct(RATE_RULES.signInAddress, origin.address);
  await countAct(RATE_RULES.signInAccount, input.email);
  const user = await userByEmail(database(), input.email);
  if (!(await verifyPassword(user?.passwordHash ?? null, input.password)) || !user)
    throw new ServiceError(
      'invalid',
      'This e-mail address and password do not belong together.',
      'Check both, or ask for a new password with the link below.'
    );
  await clearActs(RATE_RULES.signInAccount, input.email);
  await uncountAct(RATE_RULES.signInAddress, origin.address);
  await dropOldCounters();
  return startSession(user.id, origin.userAgent);
}

/** One's own address, name and age of the account. @throws ServiceError unauthenticated */
export async function profile(actor: Actor | null) {
  const person = requirePerson(actor);
  const [own] = await database()
    .select({ email: users.email, name: users.name, createdAt: users.createdAt })
    .from(users)
    .where(eq(users.id, person.id));
  return own;
}

/** Changes the name that others see. @throws ServiceError unauthenticated */
export async function renameSelf(actor: Actor | null, name: string): Promise<void> {
  const person = requirePerson(actor);
  await database().transaction(async (tx) => {
    await tx.update(users).set({ name }).where(eq(users.id, person.id));
    await audit(tx, person, {
      groupId: null,
      action: 'user.renamed',
      subjectKind: 'user',
      subjectId: person.id,
      details: { from: person.name, to: name }
    });
  });
}

/**
 * Puts a new password in place inside the caller's transaction: all sessions end, and the owner is told by mail.
 * @param hash result of `hashPassword`
 */
export async function replacePassword(tx: Executor, user: User, hash: string): Promise<void> {
  await tx.update(users).set({ passwordHash: hash }).where(eq(users.id, user.id));
  await tx.delete(sessions).where(eq(sessions.userId, user.id));
  await queueMail(tx, {
    to: user.email,
    message: passwordChangedMail({
      name: user.name,
      at: new Date(),
      link: `${new URL(config().ORIGIN).origin}/forgot`
    }),
    createdBy: user.id
  });
  const self = { id: user.id, name: user.name };
  await audit(tx, self, { groupId: null, action: 'user.password-changed', subjectKind: 'user', subjectId: user.id });
}

/**
 * Changes one's own password. All sessions end, this one too; the returned one takes its place in this browser.
 * @throws ServiceError unauthenticated, rate-limited, invalid (details.field says which entry)
 */
export async function changePassword(
  actor: Actor | null,
  input: ChangePassword,
  origin: RequestOrigin
): Promise<string> {
  const person = requirePerson(actor);
  const [user] = await database().select().from(users).where(eq(users.id, person.id));
  await countAct(RATE_RULES.signInAccount, user.email);
  if (!(await verifyPassword(user.passwordHash, input.current)))
    throw new ServiceError('invalid', 'This is not your current password.', null, { field: 'current' });
  requireGoodPassword(input.password, user.email);
  if (input.current === input.password)
    throw new ServiceError('invalid', 'The new password is the old one.', null, { field: 'password' });
  const hash = await hashPassword(input.password);
  await database().transaction((tx) => replacePassword(tx, user, hash));
  await clearActs(RATE_RULES.signInAccount, user.email);
  return startSession(user.id, origin.userAgent);
}
