import { and, eq } from 'drizzle-orm';
import { evolve, type ReviewEvent } from '$lib/review/workflow';
import type { AuditAction } from '$lib/schema/audit';
import type { VerdictInput } from '$lib/schema/review';
import { requireTree, type Actor } from '../auth/authorize';
import { database } from '../db';
import { reviewRequests, revisions, trees } from '../db/schema';
import { ServiceError } from '../errors';
import { audit } from './audit';
import { mailVerdict } from './review-mail';
import { decideOn, lockReview } from './review-state';

const AUDITED: Record<ReviewEvent['type'], AuditAction> = {
  'review-asked': 'revision.review-asked',
  'revision-superseded': 'revision.superseded',
  'revision-withdrawn': 'revision.withdrawn',
  'approval-given': 'revision.approval-given',
  'revision-approved': 'revision.approved',
  'changes-asked': 'revision.changes-asked',
  'tree-changed': 'tree.edited'
};

/**
 * Records a named reviewer's verdict on exactly the revision that they looked at.
 * @returns status of the tree afterwards
 * @throws ServiceError forbidden (own revision, not asked), invalid (reason missing), conflict (superseded, withdrawn,
 *   decided already, or another content than the one looked at)
 */
export async function giveVerdict(actor: Actor | null, treeId: string, input: VerdictInput, studyId?: string) {
  const { group, study } = await requireTree(actor, treeId, 'review.decide', studyId);
  const reviewer = actor!;
  const { verdict, revision: number, reason } = input;
  return database().transaction(async (tx) => {
    const { tree, state, open } = await lockReview(tx, treeId, group);
    const events = decideOn({ type: verdict, by: reviewer.id, revision: number, reason }, state);
    if (!open || open.hash !== input.hash)
      throw new ServiceError(
        'conflict',
        `Revision ${number} is not the content that you looked at: its hash differs.`,
        'Reload the page and look again.'
      );
    const after = events.reduce(evolve, state);
    const now = new Date();
    await tx
      .update(reviewRequests)
      .set({ verdict, reason: reason || null, decidedAt: now })
      .where(and(eq(reviewRequests.revisionId, open.id), eq(reviewRequests.reviewerId, reviewer.id)));
    const settled = events.some((event) => event.type === 'revision-approved')
      ? 'approved'
      : events.some((event) => event.type === 'changes-asked')
        ? 'changes-asked'
        : null;
    if (settled) await tx.update(revisions).set({ status: settled, decidedAt: now }).where(eq(revisions.id, open.id));
    await tx.update(trees).set({ status: after.status }).where(eq(trees.id, treeId));
    for (const event of events)
      await audit(tx, reviewer, {
        groupId: group.id,
        action: AUDITED[event.type],
        subjectKind: 'revision',
        subjectId: open.id,
        details: { treeId, number, hash: open.hash, reason: reason || null }
      });
    await mailVerdict(tx, { reviewer, authorId: open.createdBy, verdict, reason, tree, study, number });
    return { status: after.status };
  });
}
