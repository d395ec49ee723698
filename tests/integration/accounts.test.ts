import { eq } from 'drizzle-orm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { closeDatabase, database } from '$lib/server/db';
import { auditLog, mailTokens, rateLimits, users } from '$lib/server/db/schema';
import { changePassword, renameSelf, signIn } from '$lib/server/services/accounts';
import { readReset, requestReset, resetPassword } from '$lib/server/services/password-reset';
import { listSessions } from '$lib/server/services/sessions';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf, makePerson, queuedMails, TEST_PASSWORD } from '../helpers/people';

const NEW_PASSWORD = 'seven grey herons waiting';
const from = (address: string) => ({ address, userAgent: 'Mozilla/5.0 (X11; Linux x86_64; rv:140.0) Firefox/140.0' });
let test: TestDatabase;

beforeAll(async () => {
  test = await openTestDatabase();
});
afterAll(async () => {
  await closeDatabase();
  await test.close();
});

describe('signing in', () => {
  it('starts a session whose id is new each time', async () => {
    const person = await makePerson('first annotator');
    const one = await signIn({ email: person.email, password: TEST_PASSWORD }, from('192.0.2.1'));
    const two = await signIn({ email: person.email, password: TEST_PASSWORD }, from('192.0.2.1'));
    expect(one).not.toBe(two);
    expect(await listSessions(person, two)).toHaveLength(2);
  });

  it('answers a wrong password and an unknown account with the same words', async () => {
    const person = await makePerson('second annotator');
    const said = async (email: string) =>
      signIn({ email, password: 'wrong wrong wrong' }, from('192.0.2.2')).catch((e: Error) => e.message);
    expect(await said(person.email)).toBe(await said('nobody@rivenmark.test'));
    expect(await said(person.email)).toContain('do not belong together');
  });

  it('refuses the ninth wrong attempt on an account within 15 minutes, the right password included', async () => {
    const person = await makePerson('third annotator');
    const attempt = (i: number, password: string) =>
      codeOf(signIn({ email: person.email, password }, from(`192.0.2.${100 + i}`)));
    const codes = [];
    for (let i = 0; i < 8; i++) codes.push(await attempt(i, 'wrong wrong wrong'));
    expect(codes).toEqual(Array(8).fill('invalid'));
    expect(await attempt(9, TEST_PASSWORD)).toBe('rate-limited');
  });

  it('says when to try again', async () => {
    const refused = await signIn(
      { email: 'third-annotator@rivenmark.test', password: TEST_PASSWORD },
      from('192.0.2.3')
    ).catch((e: { cure: string; details: { retryAt: string } }) => e);
    expect(refused).toMatchObject({ cure: expect.stringMatching(/^Try again in \d+ (minutes|seconds?)\.$/) });
    const wait = Date.parse((refused as { details: { retryAt: string } }).details.retryAt) - Date.now();
    expect(wait).toBeGreaterThan(0);
    expect(wait).toBeLessThanOrEqual(30 * 60_000);
  });

  it('refuses the 41st wrong attempt from one network address, over different accounts', async () => {
    const attempt = (i: number) =>
      codeOf(signIn({ email: `guess-${i}@rivenmark.test`, password: 'wrong wrong wrong' }, from('198.51.100.7')));
    const codes: string[] = [];
    for (let i = 0; i < 41; i++) codes.push(await attempt(i));
    expect(codes.filter((code) => code === 'invalid')).toHaveLength(40);
    expect(codes.at(-1)).toBe('rate-limited');
  }, 60_000);

  it('does not count successes', async () => {
    const person = await makePerson('busy annotator');
    const codes = [];
    for (let i = 0; i < 12; i++)
      codes.push(await codeOf(signIn({ email: person.email, password: TEST_PASSWORD }, from('192.0.2.4'))));
    expect(codes).toEqual(Array(12).fill('no error'));
  });

  it('stores no address or account in the counters, only hashes', async () => {
    const keys = (await database().select({ key: rateLimits.key }).from(rateLimits)).map(({ key }) => key);
    expect(keys.length).toBeGreaterThan(0);
    expect(keys.every((key) => /^[a-z.-]+:[0-9a-f]{64}:\d+$/.test(key))).toBe(true);
  });
});

describe('the own account', () => {
  it('keeps a new name and logs it', async () => {
    const person = await makePerson('name changer');
    await renameSelf(person, 'name changed');
    const [row] = await database().select().from(users).where(eq(users.id, person.id));
    expect(row.name).toBe('name changed');
    const acts = await database().select().from(auditLog).where(eq(auditLog.subjectId, person.id));
    expect(acts.map(({ action }) => action)).toEqual(['user.renamed']);
  });

  it('changes the password only with the old one', async () => {
    const person = await makePerson('password changer');
    const input = { current: 'not the old one', password: NEW_PASSWORD, again: NEW_PASSWORD };
    expect(await codeOf(changePassword(person, input, from('192.0.2.5')))).toBe('invalid');
    expect(await codeOf(signIn({ email: person.email, password: TEST_PASSWORD }, from('192.0.2.5')))).toBe('no error');
  });

  it('ends all other sessions with the change, tells the owner, and the old password is void', async () => {
    const person = await makePerson('second changer');
    await signIn({ email: person.email, password: TEST_PASSWORD }, from('192.0.2.6'));
    const input = { current: TEST_PASSWORD, password: NEW_PASSWORD, again: NEW_PASSWORD };
    const kept = await changePassword(person, input, from('192.0.2.6'));
    expect((await listSessions(person, kept)).map(({ current }) => current)).toEqual([true]);
    expect((await queuedMails(person.email)).map(({ subject }) => subject)).toEqual(['Your password was changed']);
    expect(await codeOf(signIn({ email: person.email, password: TEST_PASSWORD }, from('192.0.2.6')))).toBe('invalid');
    expect(await codeOf(signIn({ email: person.email, password: NEW_PASSWORD }, from('192.0.2.6')))).toBe('no error');
  });

  it('refuses the own address as a password', async () => {
    const person = await makePerson('address lover');
    const input = { current: TEST_PASSWORD, password: person.email, again: person.email };
    expect(await codeOf(changePassword(person, input, from('192.0.2.7')))).toBe('invalid');
  });

  it('is closed to strangers', async () => {
    const input = { current: TEST_PASSWORD, password: NEW_PASSWORD, again: NEW_PASSWORD };
    expect(await codeOf(renameSelf(null, 'somebody'))).toBe('unauthenticated');
    expect(await codeOf(changePassword(null, input, from('192.0.2.8')))).toBe('unauthenticated');
  });
});

describe('resetting a password', () => {
  it('answers the same for an unknown address, and sends nothing', async () => {
    const before = await database().$count(mailTokens);
    expect(await codeOf(requestReset('unknown@rivenmark.test', '192.0.2.20'))).toBe('no error');
    expect(await database().$count(mailTokens)).toBe(before);
    expect(await queuedMails('unknown@rivenmark.test')).toEqual([]);
  });

  it('works once', async () => {
    const person = await makePerson('forgetful annotator');
    await signIn({ email: person.email, password: TEST_PASSWORD }, from('192.0.2.21'));
    await requestReset(person.email, '192.0.2.21');
    const [{ secret }] = await queuedMails(person.email);
    expect(await readReset(secret)).toEqual({ email: person.email });
    await resetPassword(secret, NEW_PASSWORD);
    expect(await listSessions(person, null)).toEqual([]);
    expect(await codeOf(signIn({ email: person.email, password: NEW_PASSWORD }, from('192.0.2.21')))).toBe('no error');
    expect(await codeOf(resetPassword(secret, 'another good phrase'))).toBe('gone');
    expect(await codeOf(readReset(secret))).toBe('gone');
  });

  it('lets one of ten simultaneous uses through', async () => {
    const person = await makePerson('hasty annotator');
    await requestReset(person.email, '192.0.2.22');
    const [{ secret }] = await queuedMails(person.email);
    const codes = await Promise.all(
      Array.from({ length: 10 }, (_, i) => codeOf(resetPassword(secret, `good phrase number ${i}`)))
    );
    expect(codes.filter((code) => code === 'no error')).toHaveLength(1);
    expect(codes.filter((code) => code === 'gone')).toHaveLength(9);
  });

  it('refuses a link after its hour, and one that a newer link replaced', async () => {
    const person = await makePerson('late annotator');
    await requestReset(person.email, '192.0.2.23');
    await requestReset(person.email, '192.0.2.23');
    const [older, newer] = await queuedMails(person.email);
    expect(await codeOf(readReset(older.secret))).toBe('gone');
    const [token] = await database()
      .select()
      .from(mailTokens)
      .where(eq(mailTokens.userId, person.id))
      .orderBy(mailTokens.createdAt);
    expect(token.expiresAt.getTime() - token.createdAt.getTime()).toBeGreaterThan(59 * 60_000);
    expect(token.expiresAt.getTime() - token.createdAt.getTime()).toBeLessThan(61 * 60_000);
    await database()
      .update(mailTokens)
      .set({ expiresAt: new Date(Date.now() - 1) })
      .where(eq(mailTokens.userId, person.id));
    expect(await codeOf(resetPassword(newer.secret, NEW_PASSWORD))).toBe('gone');
  });

  it('stores no secret, and a bad new password does not use the link up', async () => {
    const person = await makePerson('careless annotator');
    await requestReset(person.email, '192.0.2.24');
    const [{ secret }] = await queuedMails(person.email);
    const [token] = await database().select().from(mailTokens).where(eq(mailTokens.userId, person.id));
    expect(JSON.stringify(token)).not.toContain(secret);
    expect(await codeOf(resetPassword(secret, 'short'))).toBe('invalid');
    expect(await readReset(secret)).toEqual({ email: person.email });
  });

  it('limits how often a link can be asked for', async () => {
    const person = await makePerson('insistent annotator');
    const codes = [];
    for (let i = 0; i < 4; i++) codes.push(await codeOf(requestReset(person.email, '192.0.2.25')));
    expect(codes).toEqual(['no error', 'no error', 'no error', 'rate-limited']);
  });
});
