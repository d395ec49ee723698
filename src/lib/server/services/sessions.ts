import { createHash } from 'node:crypto';
import { and, desc, eq, gt, ne, sql } from 'drizzle-orm';
import type { Actor } from '../auth/authorize';
import { requirePerson } from '../auth/person';
import { lucia } from '../auth/session';
import { database } from '../db';
import { sessions } from '../db/schema';
import { ServiceError } from '../errors';
import { userAgentInWords } from './user-agent';

/** One session as its owner sees it. `handle` names it without giving it away. */
export interface SessionView {
  handle: string;
  device: string;
  createdAt: Date;
  expiresAt: Date;
  current: boolean;
}

/** Hex SHA-256 of a session id; what pages and forms carry in place of the id. */
export const sessionHandle = (id: string): string => createHash('sha256').update(id).digest('hex');

/** Starts a session under a fresh id, which the browser did not choose. @returns the id for the cookie */
export async function startSession(userId: string, userAgent: string): Promise<string> {
  const attributes = { userAgent: userAgent.slice(0, 255), createdAt: new Date() };
  return (await lucia().createSession(userId, attributes)).id;
}

/** Ends the session of this browser (signing out). Nothing happens when it has ended already. */
export async function endSession(sessionId: string | null): Promise<void> {
  if (sessionId) await lucia().invalidateSession(sessionId);
}

/** The person's sessions that are still valid, newest first. */
export async function listSessions(actor: Actor | null, currentId: string | null): Promise<SessionView[]> {
  const person = requirePerson(actor);
  const rows = await database()
    .select()
    .from(sessions)
    .where(and(eq(sessions.userId, person.id), gt(sessions.expiresAt, new Date())))
    .orderBy(desc(sessions.createdAt));
  return rows.map((row) => ({
    handle: sessionHandle(row.id),
    device: userAgentInWords(row.userAgent),
    createdAt: row.createdAt,
    expiresAt: row.expiresAt,
    current: row.id === currentId
  }));
}

/** Ends one of the person's own sessions. @throws ServiceError not-found for an ended one or somebody else's */
export async function endOwnSession(actor: Actor | null, handle: string): Promise<void> {
  const person = requirePerson(actor);
  const [result] = await database()
    .delete(sessions)
    .where(and(eq(sessions.userId, person.id), eq(sql`SHA2(${sessions.id}, 256)`, handle)));
  if (result.affectedRows === 0)
    throw new ServiceError('not-found', 'This session has ended already.', 'Reload the page to see the current list.');
}

/** Ends all of the person's sessions but this one. @returns how many ended */
export async function endOtherSessions(actor: Actor | null, currentId: string | null): Promise<number> {
  const person = requirePerson(actor);
  const [result] = await database()
    .delete(sessions)
    .where(and(eq(sessions.userId, person.id), ne(sessions.id, currentId ?? '')));
  return result.affectedRows;
}
