import { eq } from 'drizzle-orm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { lucia } from '$lib/server/auth/session';
import { closeDatabase, database } from '$lib/server/db';
import { sessions } from '$lib/server/db/schema';
import { clearActs, countAct } from '$lib/server/services/rate-limit';
import {
  endOtherSessions,
  endOwnSession,
  endSession,
  listSessions,
  sessionHandle,
  startSession
} from '$lib/server/services/sessions';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf, makePerson } from '../helpers/people';

const FIREFOX = 'Mozilla/5.0 (X11; Linux x86_64; rv:140.0) Gecko/20100101 Firefox/140.0';
let test: TestDatabase;

beforeAll(async () => {
  test = await openTestDatabase();
});
afterAll(async () => {
  await closeDatabase();
  await test.close();
});

describe('sessions', () => {
  it('are listed with the device in words, and the current one is marked', async () => {
    const person = await makePerson('lister');
    const here = await startSession(person.id, FIREFOX);
    await startSession(person.id, '');
    const list = await listSessions(person, here);
    expect(list.map(({ device, current }) => ({ device, current }))).toEqual(
      expect.arrayContaining([
        { device: 'Firefox on Linux', current: true },
        { device: 'An unknown browser', current: false }
      ])
    );
    expect(JSON.stringify(list)).not.toContain(here);
  });

  it('end one by one, and a second ending says so', async () => {
    const person = await makePerson('ender');
    const here = await startSession(person.id, FIREFOX);
    const there = await startSession(person.id, FIREFOX);
    await endOwnSession(person, sessionHandle(there));
    expect(await lucia().validateSession(there)).toEqual({ session: null, user: null });
    expect((await lucia().validateSession(here)).user?.id).toBe(person.id);
    expect(await codeOf(endOwnSession(person, sessionHandle(there)))).toBe('not-found');
  });

  it('of somebody else cannot be ended or seen', async () => {
    const owner = await makePerson('owner');
    const other = await makePerson('other');
    const id = await startSession(owner.id, FIREFOX);
    expect(await codeOf(endOwnSession(other, sessionHandle(id)))).toBe('not-found');
    expect(await listSessions(other, null)).toEqual([]);
    expect((await lucia().validateSession(id)).user?.id).toBe(owner.id);
    expect(await codeOf(listSessions(null, null))).toBe('unauthenticated');
  });

  it('all end but this one', async () => {
    const person = await makePerson('many');
    const ids = [];
    for (let i = 0; i < 4; i++) ids.push(await startSession(person.id, FIREFOX));
    expect(await endOtherSessions(person, ids[2])).toBe(3);
    expect((await listSessions(person, ids[2])).map(({ handle }) => handle)).toEqual([sessionHandle(ids[2])]);
  });

  it('that have expired are neither listed nor valid', async () => {
    const person = await makePerson('sleeper');
    const id = await startSession(person.id, FIREFOX);
    await database()
      .update(sessions)
      .set({ expiresAt: new Date(Date.now() - 5000) })
      .where(eq(sessions.id, id));
    expect(await listSessions(person, id)).toEqual([]);
    expect((await lucia().validateSession(id)).session).toBeNull();
  });

  it('end at sign-out', async () => {
    const person = await makePerson('leaver');
    const id = await startSession(person.id, FIREFOX);
    await endSession(id);
    await endSession(id);
    expect((await lucia().validateSession(id)).session).toBeNull();
  });
});

describe('the rate limit', () => {
  const rule = { scope: 'test.limit', limit: 5, window: 60_000 };
  /** seconds after the start of a window */
  const at = (seconds: number) => new Date(1_700_000_040_000 + seconds * 1000);
  const after = (subject: string, seconds: number) => codeOf(countAct(rule, subject, at(seconds)));

  it('lets exactly five of twenty simultaneous acts through', async () => {
    const codes = await Promise.all(Array.from({ length: 20 }, () => after('together', 0)));
    expect(codes.filter((code) => code === 'no error')).toHaveLength(5);
    expect(codes.filter((code) => code === 'rate-limited')).toHaveLength(15);
  });

  it('slides: after a window full of acts they come back one by one, not all at once', async () => {
    for (let i = 0; i < 5; i++) await after('sliding', 0);
    expect(await after('sliding', 19)).toBe('rate-limited');
    // 60 s windows start at 1 700 000 040: in the next one the five still weigh 5·(1 − passed share).
    expect(await after('sliding', 60 + 11)).toBe('rate-limited');
    expect(await after('sliding', 60 + 12)).toBe('no error');
    expect(await after('sliding', 60 + 13)).toBe('rate-limited');
    expect(await after('sliding', 60 + 24)).toBe('no error');
  });

  it('names the moment from which it lets the next act through', async () => {
    for (let i = 0; i < 5; i++) await after('moment', 3);
    const refusal = await countAct(rule, 'moment', at(4)).catch((e: { details: { retryAt: string } }) => e);
    const retryAt = new Date((refusal as { details: { retryAt: string } }).details.retryAt);
    expect(await codeOf(countAct(rule, 'moment', new Date(retryAt.getTime() - 1000)))).toBe('rate-limited');
    expect(await codeOf(countAct(rule, 'moment', retryAt))).toBe('no error');
  });

  it('counts subjects apart and forgets on demand', async () => {
    for (let i = 0; i < 5; i++) await after('mine', 0);
    expect(await after('yours', 0)).toBe('no error');
    await clearActs(rule, 'mine', at(0));
    expect(await after('mine', 0)).toBe('no error');
  });
});
