import { createHash } from 'node:crypto';
import { eq, inArray, lt, sql } from 'drizzle-orm';
import { database } from '../db';
import { rateLimits } from '../db/schema';
import { ServiceError } from '../errors';

/** At most `limit` acts in any stretch of `window` milliseconds, counted under `scope`. */
export interface RateRule {
  scope: string;
  limit: number;
  /** ms */
  window: number;
}

const MINUTE = 60_000;
export const RATE_RULES = {
  signInAccount: { scope: 'sign-in.account', limit: 8, window: 15 * MINUTE },
  signInAddress: { scope: 'sign-in.address', limit: 40, window: 15 * MINUTE },
  resetAccount: { scope: 'reset.account', limit: 3, window: 60 * MINUTE },
  resetAddress: { scope: 'reset.address', limit: 20, window: 60 * MINUTE },
  invitationGroup: { scope: 'invitation.group', limit: 60, window: 60 * MINUTE }
} as const satisfies Record<string, RateRule>;

const KEEP = 24 * 60 * MINUTE;

/** The subject (an e-mail or network address) is stored only as its hash. */
function keyOf(rule: RateRule, subject: string, slot: number): string {
  return `${rule.scope}:${createHash('sha256').update(subject).digest('hex')}:${slot}`;
}

/**
 * Two fixed windows make a sliding one: the last window counts by the share of it that is still inside the sliding
 * stretch.
 * @returns when one more act is allowed again, ms since 1970; a time not after `now` means at once
 */
export function nextAllowed(rule: RateRule, previous: number, current: number, now: number): number {
  const { limit, window } = rule;
  const start = Math.floor(now / window) * window;
  const passed = (now - start) / window;
  if (previous * (1 - passed) + current + 1 <= limit) return now;
  if (current + 1 <= limit) return Math.ceil(start + window * (1 - (limit - 1 - current) / previous));
  return Math.ceil(start + window + window * (1 - (limit - 1) / current));
}

/** "in 4 minutes", "in 30 seconds" */
export function waitText(milliseconds: number): string {
  const seconds = Math.max(1, Math.ceil(milliseconds / 1000));
  if (seconds < 90) return `in ${seconds} ${seconds === 1 ? 'second' : 'seconds'}`;
  return `in ${Math.ceil(seconds / 60)} minutes`;
}

/**
 * Counts one act, or refuses it; a refused act is not counted, so that waiting always helps.
 * @throws ServiceError rate-limited, saying when to try again (details.retryAt, ISO 8601)
 */
export async function countAct(rule: RateRule, subject: string, now = new Date()): Promise<void> {
  const slot = Math.floor(now.getTime() / rule.window);
  const [key, before] = [keyOf(rule, subject, slot), keyOf(rule, subject, slot - 1)];
  await database().transaction(async (tx) => {
    // The increment takes the row's lock first: parallel requests cannot all read the same old count.
    await tx
      .insert(rateLimits)
      .values({ key, windowStart: new Date(slot * rule.window), hits: 1 })
      .onDuplicateKeyUpdate({ set: { hits: sql`${rateLimits.hits} + 1` } });
    const rows = await tx
      .select()
      .from(rateLimits)
      .where(inArray(rateLimits.key, [key, before]));
    const hits = (wanted: string) => rows.find((row) => row.key === wanted)?.hits ?? 0;
    const at = nextAllowed(rule, hits(before), hits(key) - 1, now.getTime());
    if (at > now.getTime())
      throw new ServiceError(
        'rate-limited',
        'There were too many attempts.',
        `Try again ${waitText(at - now.getTime())}.`,
        { retryAt: new Date(at).toISOString() }
      );
  });
}

/** Takes back one counted act, for acts that turned out to be harmless. */
export async function uncountAct(rule: RateRule, subject: string, now = new Date()): Promise<void> {
  const key = keyOf(rule, subject, Math.floor(now.getTime() / rule.window));
  await database()
    .update(rateLimits)
    .set({ hits: sql`GREATEST(${rateLimits.hits} - 1, 0)` })
    .where(eq(rateLimits.key, key));
}

/** Forgets all acts of one subject. */
export async function clearActs(rule: RateRule, subject: string, now = new Date()): Promise<void> {
  const slot = Math.floor(now.getTime() / rule.window);
  await database()
    .delete(rateLimits)
    .where(inArray(rateLimits.key, [keyOf(rule, subject, slot), keyOf(rule, subject, slot - 1)]));
}

/** Deletes counters that no rule looks at any more. Called at sign-in, which is rare enough. */
export async function dropOldCounters(now = new Date()): Promise<void> {
  await database()
    .delete(rateLimits)
    .where(lt(rateLimits.windowStart, new Date(now.getTime() - KEEP)));
}
