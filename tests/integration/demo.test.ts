import { and, eq } from 'drizzle-orm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { database } from '$lib/server/db';
import { jobs, memberships, remarks, revisions, runs, studies, studyGuests, trees, users } from '$lib/server/db/schema';
import { DEMO_ACCOUNTS, loadDemo } from '$lib/server/demo';
import { startJobs, stopJobs } from '$lib/server/jobs/runner';
import { passwordFlaw } from '$lib/schema/password-rules';
import { signIn } from '$lib/server/services/accounts';
import { openStage, type Stage } from './support/stage';

let stage: Stage;
let seconds = 0;
const lines: string[] = [];

beforeAll(async () => {
  stage = await openStage();
  startJobs();
  const start = performance.now();
  await loadDemo((line) => lines.push(line));
  seconds = (performance.now() - start) / 1000;
}, 180_000);
afterAll(async () => {
  await stopJobs();
  await stage.close();
});

const treeNamed = async (name: string) => {
  const [tree] = await database().select().from(trees).where(eq(trees.name, name));
  return tree;
};

describe('the demo', () => {
  it('is loaded within a minute and says what it does', () => {
    expect(seconds).toBeLessThan(60);
    expect(lines.length).toBeGreaterThan(2);
  });

  it('has one account for each role, which can sign in', async () => {
    const rows = await database()
      .select({ email: users.email, role: memberships.role })
      .from(users)
      .innerJoin(memberships, eq(memberships.userId, users.id));
    expect(rows.map(({ role }) => role).sort()).toEqual(['annotator', 'guest', 'lead', 'reviewer']);
    expect(DEMO_ACCOUNTS.map(({ password, email }) => passwordFlaw(password, email))).toEqual([null, null, null, null]);
    for (const { email, password } of DEMO_ACCOUNTS)
      expect(await signIn({ email, password }, { address: '127.0.0.1', userAgent: 'test' })).not.toBe('');
  });

  it('keeps three runs that were read without a warning', async () => {
    const rows = await database().select().from(runs);
    expect(rows.map(({ state }) => state)).toEqual(['ready', 'ready', 'ready']);
    expect(rows.flatMap(({ warnings }) => warnings ?? [])).toEqual([]);
    expect(rows.map(({ info }) => Math.max(...Object.keys(info?.scans ?? {}).map(Number))).sort()).toEqual([2, 4, 4]);
  });

  it('ranks the formulas first from which its files were written', async () => {
    const rows = await database()
      .select({ name: trees.name, formula: trees.formula, adduct: trees.adduct })
      .from(trees);
    expect(rows.sort((a, b) => a.name.localeCompare(b.name))).toEqual([
      { name: 'Ester of SE-014', formula: 'C19H24N2O5', adduct: '[M+H]+' },
      { name: 'Hexoside of SE-022', formula: 'C18H24O9', adduct: '[M-H]-' },
      { name: 'Side product of SE-031', formula: 'C16H18ClN3O', adduct: '[M+H]+' }
    ]);
  });

  it('has a tree of each kind: approved, under review, draft', async () => {
    expect((await treeNamed('Hexoside of SE-022')).status).toBe('approved');
    expect((await treeNamed('Ester of SE-014')).status).toBe('in-review');
    expect((await treeNamed('Side product of SE-031')).status).toBe('draft');
    const rows = await database().select({ status: revisions.status }).from(revisions);
    expect(rows.map(({ status }) => status).sort()).toEqual(['approved', 'in-review']);
  });

  it('leaves a discussion open on an ion that nobody could explain', async () => {
    const tree = await treeNamed('Ester of SE-014');
    const rows = await database()
      .select()
      .from(remarks)
      .where(and(eq(remarks.treeId, tree.id), eq(remarks.anchor, 'ion')));
    expect(rows).toHaveLength(2);
    expect(new Set(rows.map(({ authorId }) => authorId)).size).toBe(2);
    expect(rows.every(({ resolvedAt }) => resolvedAt === null)).toBe(true);
    expect(rows[0].mz).toBeCloseTo(197.9023, 2);
  });

  it('opens one of two studies to the guest', async () => {
    expect(await database().select().from(studies)).toHaveLength(2);
    expect(await database().select().from(studyGuests)).toHaveLength(1);
  });

  it('leaves no job undone but mails', async () => {
    const rows = await database().select({ kind: jobs.kind, state: jobs.state }).from(jobs);
    expect(rows.filter(({ kind, state }) => kind !== 'mail' && state !== 'done')).toEqual([]);
  });

  it('is not loaded over accounts that somebody uses', async () => {
    await expect(loadDemo()).rejects.toThrow(/in use/);
    expect(await database().select().from(users)).toHaveLength(4);
  });

  it('begins anew where a load was cut off', async () => {
    const { sessions } = await import('$lib/server/db/schema');
    await database().delete(sessions);
    await loadDemo();
    expect(await database().select().from(trees)).toHaveLength(3);
    expect(await database().select().from(users)).toHaveLength(4);
  }, 120_000);
});
