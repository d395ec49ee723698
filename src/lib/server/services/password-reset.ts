import { and, eq, isNull } from 'drizzle-orm';
import { database } from '../db';
import { mailTokens, users } from '../db/schema';
import { queueMail, resetMail } from '../mail';
import { replacePassword, userByEmail } from './accounts';
import { issueToken, readToken, tokenLink, useToken } from './mail-token';
import { hashPassword, requireGoodPassword } from './passwords';
import { clearActs, countAct, RATE_RULES } from './rate-limit';

/** ms; longer than issuing a link takes, so that the time of the answer tells nothing. */
const LEAST_TIME = 250;

async function issueReset(email: string): Promise<void> {
  const user = await userByEmail(database(), email);
  if (!user) return;
  await database().transaction(async (tx) => {
    await tx
      .update(mailTokens)
      .set({ revoked: true })
      .where(and(eq(mailTokens.kind, 'reset'), eq(mailTokens.userId, user.id), isNull(mailTokens.usedAt)));
    const { secret, expiresAt } = await issueToken(tx, { kind: 'reset', email: user.email, userId: user.id });
    const message = resetMail({ name: user.name, link: tokenLink('reset', secret), expiresAt });
    await queueMail(tx, { to: user.email, message, notAfter: expiresAt });
  });
}

/**
 * Sends a link for a new password, if there is such an account. Open to strangers; the answer is the same, and takes
 * as long, whether there is one or not. A newer link replaces an older one.
 * @param address network address of the request
 * @throws ServiceError rate-limited
 */
export async function requestReset(email: string, address: string): Promise<void> {
  await countAct(RATE_RULES.resetAddress, address);
  await countAct(RATE_RULES.resetAccount, email);
  await Promise.all([issueReset(email), new Promise((resolve) => setTimeout(resolve, LEAST_TIME))]);
}

/** Address of the account that a reset link belongs to, for the form. Holding the secret is the permission. @throws ServiceError gone */
export async function readReset(secret: string): Promise<{ email: string }> {
  const { email } = await readToken(database(), 'reset', secret);
  return { email };
}

/**
 * Sets a new password by a reset link, which is used up with it; every session of the account ends. Holding the
 * secret is the permission.
 * @throws ServiceError gone, invalid (details.field)
 */
export async function resetPassword(secret: string, password: string): Promise<void> {
  const token = await readToken(database(), 'reset', secret);
  requireGoodPassword(password, token.email);
  const hash = await hashPassword(password);
  await database().transaction(async (tx) => {
    await useToken(tx, 'reset', secret);
    const [user] = await tx
      .select()
      .from(users)
      .where(eq(users.id, token.userId ?? ''));
    await replacePassword(tx, user, hash);
  });
  await clearActs(RATE_RULES.signInAccount, token.email);
}
