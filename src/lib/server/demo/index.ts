import { createHash } from 'node:crypto';
import type { StreamingHash } from '$lib/core/mzml';
import { createStudy } from '../services/studies';
import { changeMember } from '../services/members';
import { makePeople, removeUnfinished, type DemoPeople } from './accounts';
import { mzOf } from './peaks';
import { demoFile, precursorFormula } from './runs';
import type { DemoRun } from './scheme';
import { sendFile } from './send-file';
import { SHORE_RUNS } from './shore-runs';
import { buildTree, tellApproved, tellDraft, tellInReview } from './story';
import { jobDone } from './wait';

export { DEMO_ACCOUNTS, type DemoAccount } from './accounts';

const FRACTIONS = {
  name: 'Fractions SE-014 and SE-022',
  description: 'An ester with a basic nitrogen and a hexoside from the same shore extract. Which acid, which aglycone?'
};
const SIDE_PRODUCT = {
  name: 'Side product in SE-031',
  description: 'A chlorinated base that appeared after storage. One intense product ion is unexplained.'
};

function sha1(): StreamingHash {
  const hash = createHash('sha1');
  return { update: (bytes) => void hash.update(bytes), hex: () => hash.digest('hex') };
}

/** m/z of the precursor ion whose tree the demo builds. */
const mainMz = (run: DemoRun) => mzOf(run, precursorFormula(run.compounds[0]));

/** Uploads a run's file and builds the tree of its main compound. @returns id of the tree */
async function treeOf(people: DemoPeople, studyId: string, run: DemoRun): Promise<string> {
  const runId = await sendFile(people.annotator, studyId, run.fileName, demoFile(run, sha1));
  await jobDone('read-run', runId);
  return buildTree(people.annotator, runId, mainMz(run));
}

/**
 * Loads the invented scenario: accounts by role, a group, two studies, three runs that go the way of a user's files, a
 * tree that is approved, one under review with an open discussion, one fresh draft. What a load that was cut off left
 * is removed first; whether it was loaded completely is for the caller to note. Jobs are done by whoever takes them:
 * a running web server, or `startJobs` in this process.
 * @param progress one line for each step
 * @throws Error when a job fails, ServiceError when a service refuses
 */
export async function loadDemo(progress: (line: string) => void = () => {}): Promise<void> {
  progress('Accounts and group');
  await removeUnfinished();
  const people = await makePeople();
  const { annotator, lead, guest, groupId } = people;
  const fractions = await createStudy(annotator, { groupId, ...FRACTIONS });
  const sideProduct = await createStudy(annotator, { groupId, ...SIDE_PRODUCT });
  await changeMember(lead, groupId, { userId: guest.id, role: 'guest', studyIds: [fractions] });
  const [ester, hexoside, chlorinated] = SHORE_RUNS;
  progress(`Uploading and reading ${SHORE_RUNS.map(({ fileName }) => fileName).join(', ')}; building their trees`);
  const [inReview, approved, draft] = await Promise.all([
    treeOf(people, fractions, ester),
    treeOf(people, fractions, hexoside),
    treeOf(people, sideProduct, chlorinated)
  ]);
  progress('Claims, remarks and reviews');
  await tellDraft(people, draft);
  await tellApproved(people, approved);
  await tellInReview(people, inReview);
}
