import { eq, inArray } from 'drizzle-orm';
import { randomInt, randomUUID } from 'node:crypto';
import type { Role } from '$lib/schema/group';
import type { Actor } from '../auth/authorize';
import { database } from '../db';
import { groups, memberships, runs, sessions, studies, trees, users } from '../db/schema';
import { createGroup } from '../services/groups';
import { hashPassword } from '../services/passwords';
import { fileStore } from '../storage';

export interface DemoAccount {
  name: string;
  email: string;
  role: Role;
  password: string;
}

// prettier-ignore
const WORDS = [
  'amber', 'anchor', 'basin', 'birch', 'brine', 'cedar', 'chalk', 'cliff', 'clover', 'cobalt', 'copper', 'coral',
  'delta', 'drift', 'dune', 'ember', 'fern', 'flint', 'frost', 'gravel', 'harbor', 'hazel', 'heron', 'island',
  'juniper', 'kelp', 'lagoon', 'lichen', 'linen', 'lotus', 'maple', 'marsh', 'meadow', 'mica', 'moss', 'nettle',
  'oyster', 'pebble', 'pine', 'quartz', 'reed', 'ripple', 'saffron', 'sand', 'sedge', 'shell', 'slate', 'sorrel',
  'spruce', 'stone', 'tansy', 'thistle', 'tide', 'timber', 'umber', 'vale', 'velvet', 'walnut', 'willow', 'wren'
];

/** Four words and a number: drawn anew for each installation, because a password in the sources is none. */
const drawPassword = (): string =>
  [...Array.from({ length: 4 }, () => WORDS[randomInt(WORDS.length)]), randomInt(10, 100)].join('-');

const password = drawPassword();
const account = (role: Role): DemoAccount => ({
  name: role[0].toUpperCase() + role.slice(1),
  email: `${role}@rivenmark.invalid`,
  role,
  password
});

/** One account for each role; all share the password that this process has drawn. */
export const DEMO_ACCOUNTS: readonly DemoAccount[] = (['annotator', 'reviewer', 'lead', 'guest'] as const).map(account);

export const DEMO_GROUP = 'Shore extracts';

export interface DemoPeople {
  groupId: string;
  annotator: Actor;
  reviewer: Actor;
  lead: Actor;
  guest: Actor;
}

/**
 * Removes what a load that was cut off has left, so that it can begin anew.
 * @throws Error when somebody has signed in with a demo account: then its data are no left-overs
 */
export async function removeUnfinished(): Promise<void> {
  const db = database();
  const emails = DEMO_ACCOUNTS.map(({ email }) => email);
  const there = await db.select({ id: users.id }).from(users).where(inArray(users.email, emails));
  if (there.length === 0) return;
  const ids = there.map(({ id }) => id);
  const [used] = await db.select({ id: sessions.id }).from(sessions).where(inArray(sessions.userId, ids)).limit(1);
  if (used)
    throw new Error(
      `Accounts of the demo (${emails.join(', ')}) are in use, but the demo is not noted as loaded. ` +
        'Take these accounts out of their groups and delete them, or start with RIVENMARK_DEMO=0.'
    );
  const owned = await db.select({ id: memberships.groupId }).from(memberships).where(inArray(memberships.userId, ids));
  for (const { id } of owned) await removeGroup(id);
  await db.delete(users).where(inArray(users.id, ids));
}

async function removeGroup(groupId: string): Promise<void> {
  const db = database();
  const studyIds = db.select({ id: studies.id }).from(studies).where(eq(studies.groupId, groupId));
  const files = await db.select({ key: runs.storageKey }).from(runs).where(inArray(runs.studyId, studyIds));
  // Trees hold on to their runs, so they go first.
  await db.delete(trees).where(inArray(trees.studyId, studyIds));
  await db.delete(groups).where(eq(groups.id, groupId));
  for (const { key } of files) await fileStore().delete(key);
}

/** Makes the accounts and their group. */
export async function makePeople(): Promise<DemoPeople> {
  const db = database();
  const hash = await hashPassword(password);
  const people = DEMO_ACCOUNTS.map(({ name, email, role }) => ({ id: randomUUID(), name, email, role }));
  const find = (role: Role): Actor => {
    const { id, name } = people.find((person) => person.role === role)!;
    return { id, name };
  };
  await db.insert(users).values(people.map(({ id, name, email }) => ({ id, name, email, passwordHash: hash })));
  const lead = find('lead');
  const groupId = await createGroup(lead, DEMO_GROUP);
  const others = people.filter(({ role }) => role !== 'lead');
  await db.insert(memberships).values(others.map(({ id, role }) => ({ groupId, userId: id, role })));
  return { groupId, lead, annotator: find('annotator'), reviewer: find('reviewer'), guest: find('guest') };
}
