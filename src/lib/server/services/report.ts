import { may } from '$lib/review/permissions';
import type { RevisionContent } from '$lib/review/content';
import { buildReport, type ReportSource } from '$lib/review/report/model';
import type { ReportOptions } from '$lib/review/report/options';
import { requireTree, type Actor } from '../auth/authorize';
import { database } from '../db';
import type { trees } from '../db/schema';
import { ServiceError } from '../errors';
import type { PrintedReport } from '../report/printed';
import { revisionContent, sealed } from './revision-content';
import { frozenContent, revisionsOf, type RevisionView } from './revisions';

const noApproved = () =>
  new ServiceError(
    'not-found',
    'There is no approved revision of this tree yet, and drafts are not open to you.',
    'Come back when it was approved, or ask the lead of the group.'
  );

/** Source line of a frozen revision: its status, hash and approvals. */
export const sourceOf = (revision: RevisionView): ReportSource => ({
  revision: revision.number,
  status: revision.status,
  hash: revision.hash,
  at: revision.createdAt,
  approvals: revision.requests
    .filter((r) => r.verdict === 'approve' && r.decidedAt !== null)
    .map((r) => ({ name: r.name, at: r.decidedAt! }))
    .sort((a, b) => (a.at < b.at ? -1 : 1))
});

async function ofRevision(treeId: string, revision: RevisionView, options: ReportOptions): Promise<PrintedReport> {
  const frozen = await frozenContent(database(), treeId, revision.number);
  if (!frozen) throw noApproved();
  return { report: buildReport(frozen.content, sourceOf(revision), options), json: frozen.text };
}

function ofDraft(content: RevisionContent, options: ReportOptions): PrintedReport {
  const { text, hash } = sealed(content);
  const source: ReportSource = { revision: null, status: 'draft', hash, approvals: [], at: new Date().toISOString() };
  return { report: buildReport(content, source, options), json: text };
}

/** The newest approved revision as a report; null where there is none. For readers by link, who were checked before. */
export async function approvedReport(treeId: string, options: ReportOptions): Promise<PrintedReport | null> {
  const revision = (await revisionsOf(database(), treeId)).find((r) => r.status === 'approved');
  return revision ? ofRevision(treeId, revision, options) : null;
}

/** Which revision to print: the one asked for; else the approved one where it is the latest word; else the draft. */
function pick(
  tree: typeof trees.$inferSelect,
  open: readonly RevisionView[],
  drafts: boolean,
  wanted: ReportOptions['revision']
): RevisionView | 'draft' {
  if (wanted === 'draft' && drafts) return 'draft';
  if (typeof wanted === 'number') {
    const found = open.find((revision) => revision.number === wanted);
    if (!found)
      throw new ServiceError('not-found', `There is no revision ${wanted} open to you.`, 'Choose another one.');
    return found;
  }
  const approved = open.find((revision) => revision.status === 'approved');
  if (drafts && tree.status !== 'approved') return 'draft';
  if (!approved) throw noApproved();
  return approved;
}

/**
 * The report of a tree with the reader's choices. Whoever may not see drafts gets approved revisions only.
 * @throws ServiceError unauthenticated, not-found, forbidden
 */
export async function reportOf(actor: Actor | null, treeId: string, studyId: string, options: ReportOptions) {
  const { tree, study, role } = await requireTree(actor, treeId, 'report.approved', studyId);
  const drafts = may(role, 'report.draft');
  const all = await revisionsOf(database(), treeId);
  const open = drafts ? all : all.filter((revision) => revision.status === 'approved');
  const chosen = pick(tree, open, drafts, options.revision);
  const printed =
    chosen === 'draft'
      ? ofDraft(await revisionContent(database(), tree), options)
      : await ofRevision(treeId, chosen, options);
  return {
    ...printed,
    tree: { id: tree.id, name: tree.name, status: tree.status },
    study: { id: study.id, name: study.name },
    revisions: open.map(({ number, status, hash }) => ({ number, status, hash })),
    can: { draft: drafts, share: may(role, 'study.share') },
    place: `${study.name} / ${tree.name}`
  };
}
