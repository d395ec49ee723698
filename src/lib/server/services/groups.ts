import { randomUUID } from 'node:crypto';
import { and, asc, eq, sql } from 'drizzle-orm';
import { may, type Action } from '$lib/review/permissions';
import { initialGroupDefaults, type GroupDefaults, type Role } from '$lib/schema/group';
import type { GroupDefaultsInput } from '$lib/schema/group-defaults-form';
import { requireGroup, type Actor } from '../auth/authorize';
import { requirePerson } from '../auth/person';
import { database } from '../db';
import { groups, memberships, studies } from '../db/schema';
import { ServiceError } from '../errors';
import { audit } from './audit';

export interface OwnGroup {
  id: string;
  name: string;
  role: Role;
  members: number;
  studies: number;
  /** whether the role may open the group's settings */
  open: boolean;
}

/** The person's groups by name. @throws ServiceError unauthenticated */
export async function myGroups(actor: Actor | null): Promise<OwnGroup[]> {
  const person = requirePerson(actor);
  const rows = await database()
    .select({
      id: groups.id,
      name: groups.name,
      role: memberships.role,
      members: sql`(select count(*) from memberships m where m.group_id = ${groups.id})`.mapWith(Number),
      studies: sql`(select count(*) from ${studies} s where s.group_id = ${groups.id})`.mapWith(Number)
    })
    .from(memberships)
    .innerJoin(groups, eq(groups.id, memberships.groupId))
    .where(eq(memberships.userId, person.id))
    .orderBy(asc(groups.name));
  return rows.map((row) => ({ ...row, open: may(row.role, 'group.read') }));
}

/** Starts a group with oneself as its lead. @returns its id */
export async function createGroup(actor: Actor | null, name: string): Promise<string> {
  const person = requirePerson(actor);
  const id = randomUUID();
  await database().transaction(async (tx) => {
    await tx.insert(groups).values({ id, name, defaults: initialGroupDefaults });
    await tx.insert(memberships).values({ groupId: id, userId: person.id, role: 'lead' });
    await audit(tx, person, {
      groupId: id,
      action: 'group.created',
      subjectKind: 'group',
      subjectId: id,
      details: { name }
    });
  });
  return id;
}

export interface GroupSettings {
  id: string;
  name: string;
  role: Role;
  version: number;
  defaults: GroupDefaults;
  /** what the viewer may do here; pages show only that */
  may: Partial<Record<Action, boolean>>;
}

/** Name, defaults and the viewer's rights. @throws ServiceError as requireGroup */
export async function groupSettings(actor: Actor | null, groupId: string): Promise<GroupSettings> {
  const { group, role } = await requireGroup(actor, groupId, 'group.read');
  const rights: Action[] = ['group.edit', 'member.manage', 'audit.read'];
  return {
    id: group.id,
    name: group.name,
    role,
    version: group.version,
    defaults: group.defaults,
    may: Object.fromEntries(rights.map((action) => [action, may(role, action)]))
  };
}

/** @throws ServiceError as requireGroup */
export async function renameGroup(actor: Actor | null, groupId: string, name: string): Promise<void> {
  const { group } = await requireGroup(actor, groupId, 'group.edit');
  await database().transaction(async (tx) => {
    await tx.update(groups).set({ name }).where(eq(groups.id, groupId));
    await audit(tx, actor, {
      groupId,
      action: 'group.renamed',
      subjectKind: 'group',
      subjectId: groupId,
      details: { from: group.name, to: name }
    });
  });
}

/**
 * Saves what new trees start from. Existing trees keep their settings.
 * @throws ServiceError conflict when somebody saved after `input.version` was read, with the current
 *   `{version, defaults}` in details; and as requireGroup
 */
export async function saveGroupDefaults(
  actor: Actor | null,
  groupId: string,
  input: GroupDefaultsInput
): Promise<void> {
  await requireGroup(actor, groupId, 'group.edit');
  await database().transaction(async (tx) => {
    const [result] = await tx
      .update(groups)
      .set({ defaults: input.defaults, version: sql`${groups.version} + 1` })
      .where(and(eq(groups.id, groupId), eq(groups.version, input.version)));
    if (result.affectedRows !== 1) {
      const [now] = await tx.select().from(groups).where(eq(groups.id, groupId));
      throw new ServiceError(
        'conflict',
        'Somebody else saved these defaults while you were editing them.',
        'Your entries are still in the form. Compare them with what is saved now, then save again.',
        { version: now.version, defaults: now.defaults }
      );
    }
    await audit(tx, actor, {
      groupId,
      action: 'group.defaults-changed',
      subjectKind: 'group',
      subjectId: groupId,
      details: { ...input.defaults }
    });
  });
}
