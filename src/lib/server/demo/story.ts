import { eq } from 'drizzle-orm';
import type { TreePatch } from '$lib/schema/workbench';
import type { Actor } from '../auth/authorize';
import { database } from '../db';
import { runPrecursors, trees } from '../db/schema';
import { startBuild } from '../services/build-trees';
import { decideClaims } from '../services/claims';
import { replyTo, resolveThread, writeRemark } from '../services/remarks';
import { askForReview } from '../services/revisions';
import { editTree } from '../services/tree-edit';
import { giveVerdict } from '../services/verdicts';
import type { DemoPeople } from './accounts';
import { confirmFrom, ionNear, leaveOpen, lookAt, mzOfIon } from './tree-at-hand';
import { jobDone } from './wait';

/** Builds the tree of the precursor ion nearest to an m/z and waits for its proposals. @returns the tree's id */
export async function buildTree(actor: Actor, runId: string, mz: number): Promise<string> {
  const db = database();
  const rows = await db.select().from(runPrecursors).where(eq(runPrecursors.runId, runId));
  const [nearest] = rows.sort((a, b) => Math.abs(a.mz - mz) - Math.abs(b.mz - mz));
  if (!nearest) throw new Error('A run of the demo has no precursor ion.');
  await startBuild(actor, runId, { precursorIds: [nearest.id], separateEnergies: false });
  await jobDone('build-trees', runId);
  const built = await db.select({ id: trees.id }).from(trees).where(eq(trees.runId, runId));
  const [tree] = built;
  await jobDone('suggest', tree.id);
  return tree.id;
}

async function edit(actor: Actor, treeId: string, patch: Omit<TreePatch, 'version'>): Promise<void> {
  const { version } = await lookAt(actor, treeId);
  await editTree(actor, treeId, { version, ...patch });
}

async function ask(people: DemoPeople, treeId: string, message: string) {
  const { version } = await lookAt(people.annotator, treeId);
  return askForReview(people.annotator, treeId, { reviewers: [people.reviewer.id], message, treeVersion: version });
}

/** The glycoside: every relevant ion decided, reviewed and approved. */
export async function tellApproved(people: DemoPeople, treeId: string): Promise<void> {
  const { annotator, reviewer } = people;
  await edit(annotator, treeId, { name: 'Hexoside of SE-022', confidenceLevel: '3' });
  await confirmFrom(annotator, treeId, 1);
  await leaveOpen(annotator, treeId, 1, 'Seen in few scans and without a formula in the window: noise.');
  const { ions } = await lookAt(annotator, treeId);
  const sugar = ionNear(ions, 2, mzOfIon('C12H13O4', -1));
  const { id } = await writeRemark(reviewer, treeId, {
    anchor: 'loss',
    ionId: sugar.id,
    body: 'C6H10O5: is the sugar bound through oxygen? The loss of C4H8O4 would also fit a C-hexoside.'
  });
  await replyTo(
    annotator,
    id,
    'The aglycone C12H13O4 is by far the strongest ion, and C6H11O6 (the hexose anion) is there as well. That speaks for an O-hexoside; the position stays open.'
  );
  await resolveThread(annotator, id, true);
  const { number, hash } = await ask(
    people,
    treeId,
    'All ions from 1 % on are decided. Level 3: the position of the sugar is not shown.'
  );
  await giveVerdict(reviewer, treeId, {
    verdict: 'approve',
    reason: 'Consistent over three stages; the level is claimed modestly enough.',
    revision: number,
    hash
  });
}

/** The ester: one claim rejected, one ion unexplained, under review with an open discussion. */
export async function tellInReview(people: DemoPeople, treeId: string): Promise<void> {
  const { annotator, reviewer } = people;
  await edit(annotator, treeId, { name: 'Ester of SE-014' });
  const { ions } = await lookAt(annotator, treeId);
  const foreign = ionNear(ions, 2, mzOfIon('C10H11O3', 1));
  const unexplained = ionNear(ions, 2, 197.9023);
  await decideClaims(annotator, treeId, [
    {
      ionId: foreign.id,
      version: foreign.version,
      action: 'reject',
      reason: 'Comes from m/z 361.1646, which passes the same isolation window.'
    },
    {
      ionId: unexplained.id,
      version: unexplained.version,
      action: 'open',
      reason: 'No formula of C, H, N, O within the window, yet seen in nearly every MS2 scan. To be measured again.'
    }
  ]);
  await confirmFrom(annotator, treeId, 5, [foreign.id]);
  await ask(people, treeId, 'Please look at m/z 197.9023: I could not explain it.');
  const { id } = await writeRemark(reviewer, treeId, {
    anchor: 'ion',
    ionId: unexplained.id,
    body: 'The mass defect is too low for C, H, N and O. Could it be electronic noise, or a salt cluster?'
  });
  await replyTo(
    annotator,
    id,
    'It follows the elution of the precursor ion, so not electronic noise. A salt cluster would have to keep its metal through the isolation at m/z 361; I will measure again with another buffer.'
  );
  const acid = ionNear(ions, 2, mzOfIon('C17H21N2O3', 1));
  await writeRemark(reviewer, treeId, {
    anchor: 'loss',
    ionId: acid.id,
    body: 'Acetic acid in one step, or ketene and then water? The MS3 spectrum of m/z 343.1652 also shows m/z 301.1547.'
  });
}

/** The side product: fresh from the program, nothing decided. */
export async function tellDraft(people: DemoPeople, treeId: string): Promise<void> {
  await edit(people.annotator, treeId, { name: 'Side product of SE-031' });
}
