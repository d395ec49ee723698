import { randomUUID } from 'node:crypto';
import { eq, sql } from 'drizzle-orm';
import { initialGroupDefaults, type Role } from '$lib/schema/group';
import { database } from '$lib/server/db';
import { groups, jobs, memberships, studies, users } from '$lib/server/db/schema';
import { hashPassword } from '$lib/server/services/passwords';

/** Password of every person made here. */
export const TEST_PASSWORD = 'copper kettle under glass';
let hash: Promise<string> | null = null;

export interface TestPerson {
  id: string;
  name: string;
  email: string;
}

/** An account with TEST_PASSWORD. The address is made from the name. */
export async function makePerson(name: string): Promise<TestPerson> {
  const person = { id: randomUUID(), name, email: `${name.replaceAll(' ', '-')}@rivenmark.test` };
  await database()
    .insert(users)
    .values({ ...person, passwordHash: await (hash ??= hashPassword(TEST_PASSWORD)) });
  return person;
}

/** A group with members by role; returns its id. */
export async function makeGroup(name: string, members: [TestPerson, Role][]): Promise<string> {
  const id = randomUUID();
  await database().insert(groups).values({ id, name, defaults: initialGroupDefaults });
  if (members.length > 0)
    await database()
      .insert(memberships)
      .values(members.map(([person, role]) => ({ groupId: id, userId: person.id, role })));
  return id;
}

/** An empty study; returns its id. */
export async function makeStudy(groupId: string, name: string): Promise<string> {
  const id = randomUUID();
  await database().insert(studies).values({ id, groupId, name, description: '', updatedAt: new Date() });
  return id;
}

/** Mails that wait in the queue for an address, oldest first, with the secret of their link where they have one. */
export async function queuedMails(to: string): Promise<{ subject: string; text: string; secret: string }[]> {
  const rows = await database()
    .select({ input: jobs.input })
    .from(jobs)
    .where(eq(sql`JSON_VALUE(${jobs.input}, '$.to')`, to))
    .orderBy(jobs.createdAt);
  return rows.map(({ input }) => {
    const { subject, text } = input as { subject: string; text: string };
    return { subject, text, secret: /token=([A-Za-z0-9_-]{43})\b/.exec(text)?.[1] ?? '' };
  });
}

/** The error code a promise is refused with; anything but a refusal is a failure of the test. */
export async function codeOf(work: Promise<unknown>): Promise<string> {
  return work.then(
    () => 'no error',
    (error: { code?: string; message: string }) => error.code ?? `uncoded: ${error.message}`
  );
}
