import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { initialGroupDefaults, type Role } from '$lib/schema/group';
import type { Actor } from '$lib/server/auth/authorize';
import { closeDatabase, database } from '$lib/server/db';
import { auditLog, groups, memberships, runs, studies, studyGuests, users } from '$lib/server/db/schema';
import { createStudy, deleteStudy, editStudy, listStudies, listTrees, studyHead } from '$lib/server/services/studies';
import { openTestDatabase, type TestDatabase } from '../helpers/database';

let store: TestDatabase;
const group = randomUUID();
const people = {} as Record<Role | 'outsider', Actor>;

beforeAll(async () => {
  store = await openTestDatabase();
  const db = database();
  const other = randomUUID();
  await db.insert(groups).values([
    { id: group, name: 'Ours', defaults: initialGroupDefaults },
    { id: other, name: 'Theirs', defaults: initialGroupDefaults }
  ]);
  for (const name of ['annotator', 'reviewer', 'lead', 'guest', 'outsider'] as const) {
    people[name] = { id: randomUUID(), name };
    await db.insert(users).values({ ...people[name], email: `${name}@example.invalid`, passwordHash: 'none' });
    await db.insert(memberships).values({
      groupId: name === 'outsider' ? other : group,
      userId: people[name].id,
      role: name === 'outsider' ? 'lead' : name
    });
  }
});
afterAll(async () => {
  await closeDatabase();
  await store.close();
});

const start = (name: string) => createStudy(people.annotator, { groupId: group, name, description: '' });
const filter = { sort: 'updated' } as const;

describe('studies', () => {
  it('are started by annotators and leads, not by reviewers, guests, outsiders or strangers', async () => {
    const id = await start('Extract');
    expect((await studyHead(people.reviewer, id)).study.name).toBe('Extract');
    const input = { groupId: group, name: 'No', description: '' };
    await expect(createStudy(people.reviewer, input)).rejects.toMatchObject({ code: 'forbidden' });
    await expect(createStudy(people.guest, input)).rejects.toMatchObject({ code: 'forbidden' });
    await expect(createStudy(people.outsider, input)).rejects.toMatchObject({ code: 'not-found' });
    await expect(createStudy(null, input)).rejects.toMatchObject({ code: 'unauthenticated' });
  });

  it('do not exist for another group, nor for a guest until they are opened', async () => {
    const id = await start('Hidden');
    await expect(studyHead(people.outsider, id)).rejects.toMatchObject({ code: 'not-found' });
    await expect(listTrees(people.guest, id, filter)).rejects.toMatchObject({ code: 'not-found' });
    expect((await listStudies(people.guest)).map((study) => study.id)).not.toContain(id);
    await database().insert(studyGuests).values({ studyId: id, userId: people.guest.id });
    expect((await studyHead(people.guest, id)).can.edit).toBe(false);
    expect((await listStudies(people.guest)).map((study) => study.id)).toContain(id);
    expect((await listStudies(people.outsider)).map((study) => study.id)).not.toContain(id);
  });

  it('tell the second of two editors about the first', async () => {
    const id = await start('Before');
    await editStudy(people.annotator, id, { name: 'First', description: '', version: 1 });
    await expect(editStudy(people.lead, id, { name: 'Second', description: '', version: 1 })).rejects.toMatchObject({
      code: 'conflict'
    });
    expect((await studyHead(people.lead, id)).study.name).toBe('First');
  });

  it('are deleted by the lead alone, and only when they hold no runs', async () => {
    const id = await start('Ends');
    await expect(deleteStudy(people.annotator, id)).rejects.toMatchObject({ code: 'forbidden' });
    const run = {
      id: randomUUID(),
      studyId: id,
      fileName: 'a.mzML',
      storageKey: 'k',
      bytes: 1,
      sha1: 'x',
      sha256: 'y'
    };
    await database().insert(runs).values(run);
    await expect(deleteStudy(people.lead, id)).rejects.toMatchObject({ code: 'conflict' });
    await database().delete(runs);
    await deleteStudy(people.lead, id);
    expect((await database().select().from(studies)).map((study) => study.id)).not.toContain(id);
  });

  it('leave every act in the audit log, which nobody can rewrite', async () => {
    const acts = (await database().select().from(auditLog)).map((entry) => entry.action);
    expect(acts).toEqual(expect.arrayContaining(['study.created', 'study.edited', 'study.deleted']));
    await expect(database().update(auditLog).set({ actorName: 'nobody' })).rejects.toThrow();
    await expect(database().delete(auditLog)).rejects.toThrow();
  });
});
