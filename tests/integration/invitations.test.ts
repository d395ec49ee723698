import { and, eq } from 'drizzle-orm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { lucia } from '$lib/server/auth/session';
import { closeDatabase, database } from '$lib/server/db';
import { mailTokens, memberships, studies, studyGuests, users } from '$lib/server/db/schema';
import { acceptAsMember, acceptAsNew, readInvitation } from '$lib/server/services/invitation-answer';
import { invite, listInvitations, withdrawInvitation } from '$lib/server/services/invitations';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf, makeGroup, makePerson, makeStudy, queuedMails, type TestPerson } from '../helpers/people';

const PASSWORD = 'twelve quiet lanterns';
let test: TestDatabase;
let lead: TestPerson;
let group: string;
let otherLead: TestPerson;
let otherGroup: string;

beforeAll(async () => {
  test = await openTestDatabase();
  lead = await makePerson('lead');
  otherLead = await makePerson('other lead');
  group = await makeGroup('Shore group', [[lead, 'lead']]);
  otherGroup = await makeGroup('Hill group', [[otherLead, 'lead']]);
});
afterAll(async () => {
  await closeDatabase();
  await test.close();
});

const secretFor = async (email: string) => (await queuedMails(email)).at(-1)?.secret ?? '';
const roleIn = async (groupId: string, userId: string) =>
  (
    await database()
      .select()
      .from(memberships)
      .where(and(eq(memberships.groupId, groupId), eq(memberships.userId, userId)))
  )[0]?.role;

describe('inviting', () => {
  it('is for leads of the group only', async () => {
    const roles = ['annotator', 'reviewer', 'guest'] as const;
    const input = { email: 'somebody@rivenmark.test', role: 'annotator' as const, studyIds: [] };
    for (const role of roles) {
      const member = await makePerson(`inviting ${role}`);
      await database().insert(memberships).values({ groupId: group, userId: member.id, role });
      expect(await codeOf(invite(member, group, input))).toBe('forbidden');
      expect(await codeOf(listInvitations(member, group))).toBe('forbidden');
    }
    expect(await codeOf(invite(null, group, input))).toBe('unauthenticated');
    expect(await codeOf(invite(otherLead, group, input))).toBe('not-found');
    expect(await queuedMails(input.email)).toEqual([]);
  });

  it('makes an account in the role, which is signed in, and works once', async () => {
    const email = 'new-reviewer@rivenmark.test';
    await invite(lead, group, { email, role: 'reviewer', studyIds: [] });
    const token = await secretFor(email);
    expect(await readInvitation(token, null)).toMatchObject({ group: 'Shore group', role: 'reviewer', step: 'join' });
    const session = await acceptAsNew({ token, name: 'reviewer', password: PASSWORD }, '');
    const { user } = await lucia().validateSession(session);
    expect(user?.email).toBe(email);
    expect(await roleIn(group, user?.id ?? '')).toBe('reviewer');
    expect(await codeOf(acceptAsNew({ token, name: 'second', password: PASSWORD }, ''))).toBe('gone');
    expect(await codeOf(readInvitation(token, null))).toBe('gone');
    expect((await listInvitations(lead, group)).find((i) => i.email === email)?.state).toBe('accepted');
  });

  it('lets one of several simultaneous answers through', async () => {
    const email = 'twice@rivenmark.test';
    await invite(lead, group, { email, role: 'annotator', studyIds: [] });
    const token = await secretFor(email);
    const answers = Array.from({ length: 6 }, (_, i) =>
      codeOf(acceptAsNew({ token, name: `person ${i}`, password: PASSWORD }, ''))
    );
    const codes = await Promise.all(answers);
    expect(codes.filter((code) => code === 'no error')).toHaveLength(1);
    expect(codes.filter((code) => code === 'gone')).toHaveLength(5);
    expect(await database().$count(users, eq(users.email, email))).toBe(1);
  });

  it('expires after seven days', async () => {
    const email = 'late@rivenmark.test';
    await invite(lead, group, { email, role: 'annotator', studyIds: [] });
    const token = await secretFor(email);
    const [row] = await database().select().from(mailTokens).where(eq(mailTokens.email, email));
    expect(Math.round((row.expiresAt.getTime() - row.createdAt.getTime()) / 86_400_000)).toBe(7);
    await database()
      .update(mailTokens)
      .set({ expiresAt: new Date(Date.now() - 1) })
      .where(eq(mailTokens.email, email));
    expect(await codeOf(acceptAsNew({ token, name: 'late', password: PASSWORD }, ''))).toBe('gone');
    expect((await listInvitations(lead, group)).find((i) => i.email === email)?.state).toBe('expired');
  });

  it('again replaces the open invitation', async () => {
    const email = 'again@rivenmark.test';
    await invite(lead, group, { email, role: 'annotator', studyIds: [] });
    const older = await secretFor(email);
    await invite(lead, group, { email, role: 'reviewer', studyIds: [] });
    const newer = await secretFor(email);
    expect(await codeOf(readInvitation(older, null))).toBe('gone');
    expect((await readInvitation(newer, null)).role).toBe('reviewer');
  });

  it('can be withdrawn, by leads of the group only, and once', async () => {
    const email = 'withdrawn@rivenmark.test';
    await invite(lead, group, { email, role: 'annotator', studyIds: [] });
    const token = await secretFor(email);
    const id = (await listInvitations(lead, group)).find((i) => i.email === email)?.id ?? '';
    expect(await codeOf(withdrawInvitation(otherLead, group, id))).toBe('not-found');
    expect(await codeOf(withdrawInvitation(otherLead, otherGroup, id))).toBe('conflict');
    expect((await readInvitation(token, null)).email).toBe(email);
    await withdrawInvitation(lead, group, id);
    expect(await codeOf(acceptAsNew({ token, name: 'gone', password: PASSWORD }, ''))).toBe('gone');
    expect(await codeOf(withdrawInvitation(lead, group, id))).toBe('conflict');
  });

  it('refuses members, and studies of another group', async () => {
    const member = await makePerson('member already');
    await database().insert(memberships).values({ groupId: group, userId: member.id, role: 'annotator' });
    expect(await codeOf(invite(lead, group, { email: member.email, role: 'lead', studyIds: [] }))).toBe('duplicate');
    const foreign = await makeStudy(otherGroup, 'Foreign');
    const input = { email: 'guest-x@rivenmark.test', role: 'guest' as const, studyIds: [foreign] };
    expect(await codeOf(invite(lead, group, input))).toBe('not-found');
  });

  it('stores only the hash of the secret', async () => {
    const email = 'hashed@rivenmark.test';
    await invite(lead, group, { email, role: 'annotator', studyIds: [] });
    const secret = await secretFor(email);
    const [row] = await database().select().from(mailTokens).where(eq(mailTokens.email, email));
    expect(secret).toHaveLength(43);
    expect(JSON.stringify(row)).not.toContain(secret);
    expect(row.id).toMatch(/^[0-9a-f]{64}$/);
  });
});

describe('answering with an account', () => {
  it('adds an existing person to another group once they are signed in as that address', async () => {
    await invite(lead, group, { email: otherLead.email, role: 'annotator', studyIds: [] });
    const secret = await secretFor(otherLead.email);
    const stranger = await makePerson('stranger');
    expect((await readInvitation(secret, null)).step).toBe('sign-in');
    expect((await readInvitation(secret, stranger)).step).toBe('other-account');
    expect((await readInvitation(secret, otherLead)).step).toBe('accept');
    expect(await codeOf(acceptAsMember(null, secret))).toBe('unauthenticated');
    expect(await codeOf(acceptAsMember(stranger, secret))).toBe('forbidden');
    expect(await codeOf(acceptAsNew({ token: secret, name: 'impostor', password: PASSWORD }, ''))).toBe('conflict');
    expect(await acceptAsMember(otherLead, secret)).toBe(group);
    expect(await roleIn(group, otherLead.id)).toBe('annotator');
    expect(await roleIn(otherGroup, otherLead.id)).toBe('lead');
    expect(await codeOf(acceptAsMember(otherLead, secret))).toBe('gone');
  });

  it('opens the chosen studies to a guest, without those deleted since', async () => {
    const guest = await makePerson('invited guest');
    const [kept, dropped] = [await makeStudy(group, 'Kept'), await makeStudy(group, 'Dropped')];
    await invite(lead, group, { email: guest.email, role: 'guest', studyIds: [kept, dropped] });
    await database().delete(studies).where(eq(studies.id, dropped));
    await acceptAsMember(guest, await secretFor(guest.email));
    const opened = await database().select().from(studyGuests).where(eq(studyGuests.userId, guest.id));
    expect(opened.map(({ studyId }) => studyId)).toEqual([kept]);
  });
});
