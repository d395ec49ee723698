import { and, eq } from 'drizzle-orm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { initialGroupDefaults } from '$lib/schema/group';
import { requireStudy } from '$lib/server/auth/authorize';
import { closeDatabase, database } from '$lib/server/db';
import { auditLog, groups, studyGuests } from '$lib/server/db/schema';
import { auditPage } from '$lib/server/services/audit-log';
import { createGroup, groupSettings, myGroups, renameGroup, saveGroupDefaults } from '$lib/server/services/groups';
import { readInvitation } from '$lib/server/services/invitation-answer';
import { invite } from '$lib/server/services/invitations';
import { changeMember, leaveGroup, listMembers, removeMember, studiesToOpen } from '$lib/server/services/members';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf, makeGroup, makePerson, makeStudy, queuedMails, type TestPerson } from '../helpers/people';

let test: TestDatabase;
let lead: TestPerson;
let annotator: TestPerson;
let reviewer: TestPerson;
let guest: TestPerson;
let outsider: TestPerson;

beforeAll(async () => {
  test = await openTestDatabase();
  [lead, annotator, reviewer, guest, outsider] = await Promise.all(
    ['lead', 'annotator', 'reviewer', 'guest', 'outsider'].map(makePerson)
  );
  await makeGroup('Hill group', [[outsider, 'lead']]);
});
afterAll(async () => {
  await closeDatabase();
  await test.close();
});

const shore = () =>
  makeGroup('Shore group', [
    [lead, 'lead'],
    [annotator, 'annotator'],
    [reviewer, 'reviewer'],
    [guest, 'guest']
  ]);
const roles = async (groupId: string) =>
  Object.fromEntries((await listMembers(lead, groupId)).map(({ name, role }) => [name, role]));

describe('members', () => {
  it('are seen by members with an overview, never by guests or other groups', async () => {
    const group = await shore();
    expect((await listMembers(reviewer, group)).map(({ name }) => name)).toEqual([
      'lead',
      'reviewer',
      'annotator',
      'guest'
    ]);
    expect(await codeOf(listMembers(guest, group))).toBe('forbidden');
    expect(await codeOf(listMembers(outsider, group))).toBe('not-found');
    expect(await codeOf(listMembers(null, group))).toBe('unauthenticated');
  });

  it('are managed by leads only', async () => {
    const group = await shore();
    for (const person of [annotator, reviewer, guest]) {
      const change = { userId: person.id, role: 'lead' as const, studyIds: [] };
      expect(await codeOf(changeMember(person, group, change))).toBe('forbidden');
      expect(await codeOf(removeMember(person, group, lead.id))).toBe('forbidden');
    }
    const change = { userId: annotator.id, role: 'lead' as const, studyIds: [] };
    expect(await codeOf(changeMember(outsider, group, change))).toBe('not-found');
    expect(await codeOf(removeMember(outsider, group, annotator.id))).toBe('not-found');
    expect(await codeOf(studiesToOpen(annotator, group))).toBe('forbidden');
    expect(await roles(group)).toMatchObject({ lead: 'lead', annotator: 'annotator' });
  });

  it('change roles, with the act in the log', async () => {
    const group = await shore();
    await changeMember(lead, group, { userId: annotator.id, role: 'reviewer', studyIds: [] });
    expect((await roles(group)).annotator).toBe('reviewer');
    const { rows } = await auditPage(lead, group, { page: 1, action: null });
    expect(rows.map(({ action, details }) => [action, details.from, details.to])).toEqual([
      ['member.role-changed', 'annotator', 'reviewer']
    ]);
  });

  it('always keep a lead: the last one cannot step down, be removed or leave', async () => {
    const group = await shore();
    const down = { userId: lead.id, role: 'annotator' as const, studyIds: [] };
    expect(await codeOf(changeMember(lead, group, down))).toBe('conflict');
    expect(await codeOf(removeMember(lead, group, lead.id))).toBe('conflict');
    expect(await codeOf(leaveGroup(lead, group))).toBe('conflict');
    await changeMember(lead, group, { userId: annotator.id, role: 'lead', studyIds: [] });
    await leaveGroup(lead, group);
    expect((await listMembers(annotator, group)).map(({ name }) => name)).not.toContain('lead');
  });

  it('keep a lead when two leads step down at the same moment', async () => {
    const group = await shore();
    await changeMember(lead, group, { userId: annotator.id, role: 'lead', studyIds: [] });
    const codes = await Promise.all([codeOf(leaveGroup(lead, group)), codeOf(leaveGroup(annotator, group))]);
    expect(codes.sort()).toEqual(['conflict', 'no error']);
  });

  it('who are not in the group cannot be changed or removed through it', async () => {
    const group = await shore();
    const change = { userId: outsider.id, role: 'lead' as const, studyIds: [] };
    expect(await codeOf(changeMember(lead, group, change))).toBe('not-found');
    expect(await codeOf(removeMember(lead, group, outsider.id))).toBe('not-found');
    expect(await codeOf(leaveGroup(outsider, group))).toBe('not-found');
  });

  it('lose with their membership what they could read and the invitations they sent', async () => {
    const group = await shore();
    await changeMember(lead, group, { userId: annotator.id, role: 'lead', studyIds: [] });
    await invite(annotator, group, { email: 'asked@rivenmark.test', role: 'lead', studyIds: [] });
    const [{ secret }] = await queuedMails('asked@rivenmark.test');
    expect((await readInvitation(secret, null)).group).toBe('Shore group');
    await removeMember(lead, group, annotator.id);
    expect(await codeOf(readInvitation(secret, null))).toBe('gone');
    expect(await codeOf(groupSettings(annotator, group))).toBe('not-found');
  });
});

describe('guests', () => {
  it('read exactly the studies opened to them', async () => {
    const group = await shore();
    const [one, two] = [await makeStudy(group, 'One'), await makeStudy(group, 'Two')];
    await changeMember(lead, group, { userId: guest.id, role: 'guest', studyIds: [one] });
    expect((await requireStudy(guest, one, 'study.read')).study.name).toBe('One');
    expect(await codeOf(requireStudy(guest, two, 'study.read'))).toBe('not-found');
    await changeMember(lead, group, { userId: guest.id, role: 'guest', studyIds: [two] });
    expect(await codeOf(requireStudy(guest, one, 'study.read'))).toBe('not-found');
  });

  it('are opened no study of another group, nor lose one there', async () => {
    const group = await shore();
    const elsewhere = await makeGroup('Third group', [
      [outsider, 'lead'],
      [guest, 'guest']
    ]);
    const foreign = await makeStudy(elsewhere, 'Foreign');
    await changeMember(outsider, elsewhere, { userId: guest.id, role: 'guest', studyIds: [foreign] });
    const change = { userId: guest.id, role: 'guest' as const, studyIds: [foreign] };
    expect(await codeOf(changeMember(lead, group, change))).toBe('not-found');
    await removeMember(lead, group, guest.id);
    const kept = await database()
      .select()
      .from(studyGuests)
      .where(and(eq(studyGuests.userId, guest.id), eq(studyGuests.studyId, foreign)));
    expect(kept).toHaveLength(1);
  });
});

describe('groups', () => {
  it('are started by any signed-in person, who becomes lead', async () => {
    const person = await makePerson('founder');
    const id = await createGroup(person, 'New group');
    expect(await myGroups(person)).toEqual([
      { id, name: 'New group', role: 'lead', members: 1, studies: 0, open: true }
    ]);
    expect(await codeOf(createGroup(null, 'Nobody'))).toBe('unauthenticated');
  });

  it('are renamed by leads only', async () => {
    const group = await shore();
    await renameGroup(lead, group, 'Dune group');
    expect((await groupSettings(annotator, group)).name).toBe('Dune group');
    expect(await codeOf(renameGroup(annotator, group, 'Mine'))).toBe('forbidden');
    expect(await codeOf(renameGroup(outsider, group, 'Mine'))).toBe('not-found');
  });

  it('refuse defaults that were edited from an older state, and show the newer one', async () => {
    const group = await shore();
    const defaults = { ...initialGroupDefaults, elements: 'C0-40H0-80O0-20', approvalsNeeded: 2 };
    await saveGroupDefaults(lead, group, { version: 1, defaults });
    const stale = await saveGroupDefaults(lead, group, { version: 1, defaults: initialGroupDefaults }).catch(
      (e: unknown) => e
    );
    expect(stale).toMatchObject({ code: 'conflict', details: { version: 2, defaults } });
    const [row] = await database().select().from(groups).where(eq(groups.id, group));
    expect([row.version, row.defaults]).toEqual([2, defaults]);
    expect(await codeOf(saveGroupDefaults(reviewer, group, { version: 2, defaults }))).toBe('forbidden');
    expect(await codeOf(saveGroupDefaults(outsider, group, { version: 2, defaults }))).toBe('not-found');
  });
});

describe('the audit log', () => {
  it('is read by leads of the group, in pages and by kind of act', async () => {
    const group = await shore();
    const act = { actorName: 'lead', subjectKind: 'tree' as const, subjectId: 'x', details: {}, groupId: group };
    await database()
      .insert(auditLog)
      .values([
        ...Array.from({ length: 60 }, () => ({ ...act, action: 'tree.edited' })),
        { ...act, action: 'tree.built' }
      ]);
    const second = await auditPage(lead, group, { page: 2, action: null });
    expect([second.total, second.pages, second.rows.length]).toEqual([61, 2, 11]);
    const built = await auditPage(lead, group, { page: 1, action: 'tree.built' });
    expect(built.rows.map(({ action }) => action)).toEqual(['tree.built']);
    expect(built.actions).toEqual(['tree.built', 'tree.edited']);
    expect((await auditPage(lead, group, { page: 99, action: null })).page).toBe(2);
    for (const person of [annotator, reviewer, guest])
      expect(await codeOf(auditPage(person, group, { page: 1, action: null }))).toBe('forbidden');
    expect(await codeOf(auditPage(outsider, group, { page: 1, action: null }))).toBe('not-found');
  });
});
