import { eq } from 'drizzle-orm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { database } from '$lib/server/db';
import { ions, jobs, mailTokens, memberships, runs, shareLinks, studies, trees } from '$lib/server/db/schema';
import { sourcesBelow } from '../unit/support/sources';
import { entriesOf } from '../unit/support/guards';
import { ask, type Ask, type Outcome } from './authorization/ask';
import { ELSEWHERE, ROWS, TRANSFERS, type Row } from './authorization/rows';
import { ACTORS, openWorld, SECRET, treeState, type ActorName, type Estate, type World } from './authorization/world';

let world: World;
beforeAll(async () => {
  world = await openWorld();
});
afterAll(() => world?.close());

const OUTSIDERS: readonly ActorName[] = ['lead of another group', 'member of no group'];
const GUEST_ELSEWHERE = 'guest of another study';

function expected({ may, ofGroup, granted = 'in', refused = 'forbidden' }: Row, actor: ActorName): Outcome {
  if (actor === 'stranger') return 'sign in';
  if (may === 'signed in' || may.includes(actor)) return granted;
  if (OUTSIDERS.includes(actor)) return 'hidden';
  return actor === GUEST_ELSEWHERE && !ofGroup ? 'hidden' : refused;
}

/** Nothing of the group may stand in an answer to somebody who was not let in. */
const leaks = (body: string): boolean => body.includes(SECRET);

it('every entry of every route is in the table', () => {
  const modules = sourcesBelow('src/routes', /\/\+(page|layout)\.server\.ts$|\/\+server\.ts$/);
  const entries = modules.flatMap(entriesOf).map(({ name }) => name);
  const known = new Set([...ROWS.map(({ entry }) => entry), ...ELSEWHERE]);
  expect(entries.filter((name) => !known.has(name))).toEqual([]);
  expect([...known].filter((name) => !entries.includes(name))).toEqual([]);
});

describe.each(ROWS)('$entry', (row) => {
  it.each(ACTORS)('as %s', async (actor) => {
    const request = row.ask(world.ours, world);
    const answer = await ask(world, actor, request);
    expect({ outcome: answer.outcome, status: answer.status }).toMatchObject({ outcome: expected(row, actor) });
    if (answer.outcome !== 'in' || actor === 'stranger' || OUTSIDERS.includes(actor))
      expect(leaks(answer.body)).toBe(false);
  });
});

describe('what a page loads when the browser moves to it', () => {
  const pages = ROWS.filter(({ entry }) => entry.includes('(app)') && entry.endsWith(' load'));
  it.each(pages)('$entry tells outsiders nothing', async (row) => {
    const { path } = row.ask(world.ours, world);
    for (const actor of [...OUTSIDERS, GUEST_ELSEWHERE, 'stranger'] as const) {
      const answer = await ask(world, actor, { method: 'GET', path: `${path === '/' ? '' : path}/__data.json` });
      const own = actor === GUEST_ELSEWHERE;
      // The guest of another study is a member of the group, whose name the header shows.
      expect(leaks(own ? answer.body.replaceAll(`${SECRET} group`, '') : answer.body)).toBe(false);
    }
  });
});

describe('a transfer', () => {
  it.each(TRANSFERS)('%s is for the person who began it', async (method) => {
    const headers = {
      'tus-resumable': '1.0.0',
      'upload-offset': '0',
      'content-type': 'application/offset+octet-stream'
    };
    const request: Ask = { method, path: `/api/uploads/${world.ours.upload}`, headers };
    for (const actor of ACTORS.filter((name) => name !== 'annotator')) {
      const { outcome } = await ask(world, actor, request);
      expect([actor, outcome]).toEqual([actor, actor === 'stranger' ? 'sign in' : 'hidden']);
    }
  });
});

describe('acts that cannot be taken back', () => {
  const ACTS: [what: string, entryOf: (e: Estate) => Ask, may: readonly ActorName[]][] = [
    [
      'deleting a run',
      (e) => ({ method: 'POST', path: `/studies/${e.study}/runs/${e.run}?/delete`, form: {} }),
      ['annotator', 'lead']
    ],
    ['deleting a study', (e) => ({ method: 'POST', path: `/studies/${e.study}?/delete`, form: {} }), ['lead']]
  ];
  it.each(ACTS)('%s', async (_what, request, may) => {
    for (const actor of ACTORS.filter((name) => !may.includes(name))) {
      const { outcome } = await ask(world, actor, request(world.ours));
      const member = ['guest', 'reviewer', 'annotator', 'lead'].includes(actor);
      expect([actor, outcome]).toEqual([actor, actor === 'stranger' ? 'sign in' : member ? 'forbidden' : 'hidden']);
    }
    expect(await database().$count(runs, eq(runs.id, world.ours.run))).toBe(1);
    expect(await database().$count(studies, eq(studies.id, world.ours.study))).toBe(1);
  });
});

describe('ids of another group', () => {
  type Mixed = [what: string, actor: ActorName, request: (ours: Estate, theirs: Estate) => Ask];
  const mixed: Mixed[] = [
    [
      'their tree under our study',
      'annotator',
      (o, t) => ({ method: 'GET', path: `/studies/${o.study}/trees/${t.tree}` })
    ],
    [
      'our tree under their study',
      'lead of another group',
      (o, t) => ({ method: 'GET', path: `/studies/${t.study}/trees/${o.tree}` })
    ],
    [
      'our review under their study',
      'lead of another group',
      (o, t) => ({ method: 'GET', path: `/studies/${t.study}/trees/${o.tree}/review` })
    ],
    [
      'our report under their study',
      'lead of another group',
      (o, t) => ({ method: 'GET', path: `/studies/${t.study}/trees/${o.approved}/report` })
    ],
    [
      'our PDF under their study',
      'lead of another group',
      (o, t) => ({ method: 'GET', path: `/studies/${t.study}/trees/${o.approved}/report/report.pdf` })
    ],
    [
      'our run under their study',
      'lead of another group',
      (o, t) => ({ method: 'GET', path: `/studies/${t.study}/runs/${o.run}` })
    ],
    [
      'deleting our run under their study',
      'lead of another group',
      (o, t) => ({ method: 'POST', path: `/studies/${t.study}/runs/${o.run}?/delete`, form: {} })
    ],
    [
      'our ion under their tree',
      'lead of another group',
      (o, t) => ({ method: 'GET', path: `/api/trees/${t.tree}/ions/${o.ion}` })
    ],
    [
      'a claim on our ion through their tree',
      'lead of another group',
      (o, t) => ({
        method: 'POST',
        path: `/api/trees/${t.tree}/claims`,
        json: { decisions: [{ ionId: o.ion, version: o.ionVersion, action: 'reject', reason: 'no' }] }
      })
    ],
    [
      'a remark on our ion in their tree',
      'lead of another group',
      (o, t) => ({
        method: 'POST',
        path: `/api/trees/${t.tree}/remarks`,
        json: { anchor: 'ion', ionId: o.ion, body: 'Hello.' }
      })
    ],
    [
      'revoking our link under their study',
      'lead of another group',
      (o, t) => ({
        method: 'POST',
        path: `/studies/${t.study}/trees/${t.tree}/report?/revoke`,
        form: { id: o.link.id }
      })
    ],
    [
      'withdrawing our invitation in their group',
      'lead of another group',
      (o, t) => ({
        method: 'POST',
        path: `/settings/${t.group}/invitations?/withdraw`,
        form: { invitation: o.invitation }
      })
    ],
    [
      'a role for our member in their group',
      'lead of another group',
      (o, t) => ({ method: 'POST', path: `/settings/${t.group}?/change`, form: { userId: o.reviewer, role: 'lead' } })
    ],
    [
      'taking our member out in their group',
      'lead of another group',
      (o, t) => ({ method: 'POST', path: `/settings/${t.group}?/remove`, form: { userId: o.reviewer } })
    ]
  ];
  it.each(mixed)('%s', async (what, actor, request) => {
    const before = await everything();
    const answer = await ask(world, actor, request(world.ours, world.theirs));
    // An invitation that is not theirs is said to be open no more, as one that was used.
    expect(answer.status).toBe(/invitation/.test(what) ? 409 : 404);
    if (actor !== 'annotator') expect(leaks(answer.body)).toBe(false);
    expect(await everything()).toEqual(before);
  });

  it('a guest of theirs cannot be given a study of ours', async () => {
    const form = { userId: world.theirs.reviewer, role: 'guest', 'studyIds[]': [world.ours.study] };
    const answer = await ask(world, 'lead of another group', {
      ...{ method: 'POST', path: `/settings/${world.theirs.group}?/change`, form }
    });
    expect(answer.status).toBeGreaterThanOrEqual(400);
    expect(leaks(answer.body)).toBe(false);
  });

  it('a reviewer of theirs cannot be asked for a review of ours', async () => {
    const { version } = await treeState(world.ours.tree);
    const form = { 'reviewers[]': [world.theirs.reviewer], message: '', treeVersion: String(version) };
    const path = `/studies/${world.ours.study}/trees/${world.ours.tree}/review?/ask`;
    const answer = await ask(world, 'annotator', { method: 'POST', path, form });
    expect(answer.status).toBeGreaterThanOrEqual(400);
    expect((await treeState(world.ours.tree)).status).toBe('draft');
  });
});

describe('requests from another site', () => {
  const foreign = { origin: 'https://elsewhere.invalid' };
  it.each<[string, (e: Estate) => Ask]>([
    ['a form', (e) => ({ method: 'POST', path: `/settings/${e.group}/defaults?/rename`, form: { name: 'Taken' } })],
    ['an API call', (e) => ({ method: 'POST', path: `/api/trees/${e.tree}/suggest` })],
    [
      'a transfer',
      (e) => ({ method: 'DELETE', path: `/api/uploads/${e.upload}`, headers: { 'tus-resumable': '1.0.0' } })
    ]
  ])('%s is refused even with a lead’s session', async (_what, request) => {
    const made = request(world.ours);
    const { status } = await ask(world, 'lead', { ...made, headers: { ...made.headers, ...foreign } });
    expect(status).toBe(403);
  });
});

describe('links shared without an account', () => {
  const open = (token: string) => ask(world, 'stranger', { method: 'GET', path: `/shared/${token}` });

  it('show what they were made for', async () => {
    const answer = await open(world.ours.link.token);
    expect(answer.status).toBe(200);
    expect(answer.body).toContain(`${SECRET} approved`);
    expect(answer.body).not.toContain(`${SECRET} draft`);
    expect(answer.body).not.toContain(`${SECRET} remark`);
  });

  it('show nothing with another secret, and nothing once they were revoked', async () => {
    expect((await open('A'.repeat(43))).outcome).toBe('hidden');
    const path = `/studies/${world.ours.study}/trees/${world.ours.approved}/report?/revoke`;
    const revoked = await ask(world, 'lead', { method: 'POST', path, form: { id: world.ours.link.id } });
    expect(revoked.status).toBe(200);
    const after = await open(world.ours.link.token);
    expect([after.outcome, leaks(after.body)]).toEqual(['hidden', false]);
  });
});

it('a member who leaves loses what was open to them', async () => {
  const left = await ask(world, 'reviewer', { method: 'POST', path: `/settings/${world.ours.group}?/leave`, form: {} });
  expect(left.outcome).toBe('in');
  const answer = await ask(world, 'reviewer', { method: 'GET', path: `/studies/${world.ours.study}` });
  expect([answer.outcome, leaks(answer.body)]).toEqual(['hidden', false]);
});

/** The rows that a crossed id could have touched. */
async function everything() {
  const db = database();
  return {
    trees: await db.select({ id: trees.id, version: trees.version }).from(trees).orderBy(trees.id),
    ions: await db.select({ id: ions.id, version: ions.version }).from(ions).orderBy(ions.id),
    runs: await db.$count(runs),
    jobs: await db.$count(jobs),
    links: await db
      .select({ id: shareLinks.id, revokedAt: shareLinks.revokedAt })
      .from(shareLinks)
      .orderBy(shareLinks.id),
    invitations: await db.$count(mailTokens),
    members: await db.select().from(memberships).orderBy(memberships.groupId, memberships.userId)
  };
}
