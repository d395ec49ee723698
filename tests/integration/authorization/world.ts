import { randomUUID } from 'node:crypto';
import { eq } from 'drizzle-orm';
import { closeDatabase, database } from '$lib/server/db';
import { jobs, runs, shareLinks, studyGuests, trees } from '$lib/server/db/schema';
import { enqueue } from '$lib/server/jobs/queue';
import { invite, listInvitations } from '$lib/server/services/invitations';
import { writeRemark } from '$lib/server/services/remarks';
import { askForReview } from '$lib/server/services/revisions';
import { startSession } from '$lib/server/services/sessions';
import { shareStudy, shareTree } from '$lib/server/services/share';
import { openUpload } from '$lib/server/services/uploads';
import { giveVerdict } from '$lib/server/services/verdicts';
import { makeGroup, makePerson, makeStudy, type TestPerson } from '../../helpers/people';
import { startProduct, type Product } from '../../helpers/server';
import { ionAt, makeTree, treeRow } from '../review-fixture';

/** Everybody who asks. The first five belong to the group that owns the things; the last three must not learn of them. */
export const ACTORS = [
  'guest',
  'reviewer',
  'annotator',
  'lead',
  'guest of another study',
  'lead of another group',
  'member of no group',
  'stranger'
] as const;
export type ActorName = (typeof ACTORS)[number];

/** Stands in the name of everything that is not for outsiders. */
export const SECRET = 'Kelp41';

/** The things of one group. */
export interface Estate {
  group: string;
  study: string;
  run: string;
  /** a draft */
  tree: string;
  /** a tree with an approved revision */
  approved: string;
  ion: number;
  ionVersion: number;
  remark: string;
  job: string;
  upload: string;
  link: { id: string; token: string };
  invitation: string;
  /** ids of its people */
  reviewer: string;
  annotator: string;
}

export interface World {
  product: Product;
  ours: Estate;
  theirs: Estate;
  /** value of the session cookie; null for the stranger */
  sessions: Record<ActorName, string | null>;
  ids: Record<Exclude<ActorName, 'stranger'>, string>;
  close(): Promise<void>;
}

interface Team {
  annotator: TestPerson;
  reviewer: TestPerson;
  lead: TestPerson;
}

const tokenOf = ({ url }: { url: string }): string => url.slice(url.lastIndexOf('/') + 1);

async function approve(treeId: string, team: Team): Promise<void> {
  const { version: treeVersion } = await treeRow(treeId);
  const request = { reviewers: [team.reviewer.id], message: '', treeVersion };
  const { number, hash } = await askForReview(team.annotator, treeId, request);
  await giveVerdict(team.reviewer, treeId, { verdict: 'approve', reason: '', revision: number, hash });
}

/** A group with one of everything that a route can name. */
async function makeEstate(name: string, groupId: string, team: Team): Promise<Estate> {
  const study = await makeStudy(groupId, `${name} study`);
  const tree = await makeTree(study, team.annotator, `${name} draft`);
  const approved = await makeTree(study, team.annotator, `${name} approved`);
  await approve(approved, team);
  const { runId } = await treeRow(tree);
  await database()
    .update(runs)
    .set({ fileName: `${name}.mzML` })
    .where(eq(runs.id, runId));
  const ion = await ionAt(tree, 0, 1);
  const { id: remark } = await writeRemark(team.reviewer, tree, { anchor: 'tree', body: `${name} remark` });
  const job = await enqueue(database(), {
    ...{ groupId, studyId: study, kind: 'suggest', subjectId: approved, input: {}, createdBy: null },
    what: `${name} job`
  });
  await database().update(jobs).set({ state: 'failed' }).where(eq(jobs.id, job));
  const upload = randomUUID();
  await openUpload(team.annotator, upload, { filename: `${name}-2.mzML`, studyId: study, bytes: 1000 });
  await shareStudy(team.lead, study, 5);
  const shared = await shareTree(team.lead, approved, study, 5);
  await invite(team.lead, groupId, { email: `${name.toLowerCase()}@rivenmark.test`, role: 'reviewer', studyIds: [] });
  const [invitation] = await listInvitations(team.lead, groupId);
  const [link] = await database().select().from(shareLinks).where(eq(shareLinks.treeId, approved));
  return {
    ...{ group: groupId, study, run: runId, tree, approved, ion: ion.id, ionVersion: ion.version, remark, job, upload },
    ...{ link: { id: link.id, token: tokenOf(shared) }, invitation: invitation.id },
    ...{ reviewer: team.reviewer.id, annotator: team.annotator.id }
  };
}

/** Two groups with one of everything each, served by the built product; jobs stay where they are. */
export async function openWorld(): Promise<World> {
  const product = await startProduct({ env: { RIVENMARK_WORKERS: '0' } });
  const close = async () => {
    await closeDatabase();
    await product.stop();
  };
  try {
    const names = ACTORS.filter((name) => name !== 'stranger');
    const made = await Promise.all(names.map((name) => makePerson(name)));
    const people = Object.fromEntries(names.map((name, i) => [name, made[i]])) as Record<
      Exclude<ActorName, 'stranger'>,
      TestPerson
    >;
    const { annotator, reviewer, lead, guest } = people;
    const closed = people['guest of another study'];
    const group = await makeGroup(`${SECRET} group`, [
      [annotator, 'annotator'],
      [reviewer, 'reviewer'],
      [lead, 'lead'],
      [guest, 'guest'],
      [closed, 'guest']
    ]);
    const ours = await makeEstate(SECRET, group, { annotator, reviewer, lead });
    const other = await makeStudy(group, 'A study for the other guest');
    await database()
      .insert(studyGuests)
      .values([
        { studyId: ours.study, userId: guest.id },
        { studyId: other, userId: closed.id }
      ]);
    const foreign = people['lead of another group'];
    const [annotator2, reviewer2] = await Promise.all([makePerson('their annotator'), makePerson('their reviewer')]);
    const theirGroup = await makeGroup('Theirs', [
      [foreign, 'lead'],
      [annotator2, 'annotator'],
      [reviewer2, 'reviewer']
    ]);
    const theirs = await makeEstate('Theirs', theirGroup, {
      annotator: annotator2,
      reviewer: reviewer2,
      lead: foreign
    });
    const started = await Promise.all(names.map((name) => startSession(people[name].id, 'test')));
    const sessions = Object.fromEntries([...names.map((name, i) => [name, started[i]]), ['stranger', null]]);
    const ids = Object.fromEntries(names.map((name) => [name, people[name].id]));
    return { product, ours, theirs, sessions: sessions as World['sessions'], ids: ids as World['ids'], close };
  } catch (error) {
    await close();
    throw error;
  }
}

/** What nobody may have changed: version and state of a tree. */
export const treeState = async (id: string) => {
  const [row] = await database()
    .select({ version: trees.version, status: trees.status, name: trees.name })
    .from(trees)
    .where(eq(trees.id, id));
  return row;
};
