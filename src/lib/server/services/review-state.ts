import { and, desc, eq, max } from 'drizzle-orm';
import {
  decide,
  WorkflowError,
  type ReviewCommand,
  type ReviewEvent,
  type ReviewState,
  type WorkflowErrorCode
} from '$lib/review/workflow';
import type { Executor } from '../db/connection';
import { reviewRequests, revisions, trees, type groups } from '../db/schema';
import { ServiceError, type ServiceErrorCode } from '../errors';

const CODES: Record<WorkflowErrorCode, ServiceErrorCode> = {
  'not-now': 'conflict',
  superseded: 'conflict',
  'already-decided': 'conflict',
  'own-revision': 'forbidden',
  'not-asked': 'forbidden',
  'not-author': 'forbidden',
  'reason-missing': 'invalid',
  'too-few-reviewers': 'invalid',
  'reviewer-is-author': 'invalid'
};

/** Decides a command against the state; the workflow's refusal becomes a ServiceError. */
export function decideOn(command: ReviewCommand, state: ReviewState): ReviewEvent[] {
  try {
    return decide(command, state);
  } catch (e) {
    if (e instanceof WorkflowError) throw new ServiceError(CODES[e.code], e.message, e.cure, { reason: e.code });
    throw e;
  }
}

const head = {
  id: revisions.id,
  number: revisions.number,
  status: revisions.status,
  hash: revisions.hash,
  treeVersion: revisions.treeVersion,
  createdBy: revisions.createdBy
};

/**
 * Locks the tree's row, so that verdicts, requests and changes of claims follow each other, and reads where its review
 * stands. Approvals needed never exceed the number of reviewers asked: a default raised later does not block a revision.
 */
export async function lockReview(tx: Executor, treeId: string, group: Pick<typeof groups.$inferSelect, 'defaults'>) {
  const [tree] = await tx.select().from(trees).where(eq(trees.id, treeId)).for('update');
  if (!tree) throw new ServiceError('not-found', 'The tree was deleted.', 'Go back to the study.');
  const [latest] = await tx
    .select(head)
    .from(revisions)
    .where(eq(revisions.treeId, treeId))
    .orderBy(desc(revisions.number))
    .limit(1);
  const [{ approved }] = await tx
    .select({ approved: max(revisions.number) })
    .from(revisions)
    .where(and(eq(revisions.treeId, treeId), eq(revisions.status, 'approved')));
  const requests = latest ? await tx.select().from(reviewRequests).where(eq(reviewRequests.revisionId, latest.id)) : [];
  const common = { revision: latest?.number ?? 0, approved };
  const open = latest?.status === 'in-review' ? latest : null;
  const author = latest?.createdBy ?? '';
  let state: ReviewState;
  if (open)
    state = {
      ...common,
      status: 'in-review',
      author,
      reviewers: requests.map((r) => r.reviewerId),
      approvals: requests.filter((r) => r.verdict === 'approve').map((r) => r.reviewerId),
      approvalsNeeded: Math.min(group.defaults.approvalsNeeded, requests.length),
      changedSince: tree.version !== open.treeVersion
    };
  else if (latest?.status === 'changes-asked') state = { ...common, status: 'changes-asked', author };
  else state = { ...common, status: tree.status === 'approved' ? 'approved' : 'draft' };
  return { tree, state, open, requests };
}
