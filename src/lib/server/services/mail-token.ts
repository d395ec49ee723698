import { createHash, randomBytes } from 'node:crypto';
import { and, eq, gt, isNull } from 'drizzle-orm';
import { config } from '../config';
import type { Executor } from '../db/connection';
import { mailTokens } from '../db/schema';
import { ServiceError } from '../errors';

export type TokenKind = (typeof mailTokens.$inferSelect)['kind'];
export type MailToken = typeof mailTokens.$inferSelect;

const HOUR = 3_600_000;
/** How long a link sent by mail works, ms. */
export const TOKEN_LIFE: Record<TokenKind, number> = { invitation: 7 * 24 * HOUR, reset: HOUR };

/** Hex SHA-256; only this is stored. */
export const tokenId = (secret: string): string => createHash('sha256').update(secret).digest('hex');

type NewToken = Pick<MailToken, 'kind' | 'email'> & Partial<Omit<MailToken, 'id' | 'kind' | 'email' | 'expiresAt'>>;

/** Makes a single-use link. @returns the secret, which exists nowhere else, its id and the end of its life */
export async function issueToken(tx: Executor, token: NewToken, now = new Date()) {
  const secret = randomBytes(32).toString('base64url');
  const expiresAt = new Date(now.getTime() + TOKEN_LIFE[token.kind]);
  const id = tokenId(secret);
  await tx.insert(mailTokens).values({ ...token, id, expiresAt });
  return { secret, id, expiresAt };
}

/** Full address of the page that takes the link; the secret is in the query, which no log holds. */
export const tokenLink = (kind: TokenKind, secret: string): string =>
  `${new URL(config().ORIGIN).origin}/${kind}?token=${secret}`;

function gone(kind: TokenKind): ServiceError {
  const [what, cure] =
    kind === 'reset'
      ? ['link to choose a new password', 'Ask for a new link on the sign-in page.']
      : ['invitation', 'Ask the lead of the group for a new one.'];
  return new ServiceError('gone', `This ${what} is not valid: it was used, withdrawn, replaced or is too old.`, cure);
}

const usable = (kind: TokenKind, secret: string, now: Date) =>
  and(
    eq(mailTokens.id, tokenId(secret)),
    eq(mailTokens.kind, kind),
    isNull(mailTokens.usedAt),
    eq(mailTokens.revoked, false),
    gt(mailTokens.expiresAt, now)
  );

/** Looks at a link without using it. @throws ServiceError gone */
export async function readToken(tx: Executor, kind: TokenKind, secret: string, now = new Date()): Promise<MailToken> {
  const [token] = await tx
    .select()
    .from(mailTokens)
    .where(usable(kind, secret, now));
  if (!token) throw gone(kind);
  return token;
}

/** Uses a link up; of two requests at the same time one gets it. Call inside the transaction of its effect. @throws ServiceError gone */
export async function useToken(tx: Executor, kind: TokenKind, secret: string, now = new Date()): Promise<void> {
  const [result] = await tx
    .update(mailTokens)
    .set({ usedAt: now })
    .where(usable(kind, secret, now));
  if (result.affectedRows !== 1) throw gone(kind);
}
