import { and, desc, eq, lt } from 'drizzle-orm';
import { checkList } from '$lib/review/checklist';
import { diffRevisions, isSame } from '$lib/review/diff';
import { may } from '$lib/review/permissions';
import { accepts, type ReviewStatus } from '$lib/review/workflow';
import type { RevisionContent } from '$lib/review/content';
import { requireTree, type Actor, type TreeAccess } from '../auth/authorize';
import { database } from '../db';
import { auditLog, revisions } from '../db/schema';
import { ServiceError } from '../errors';
import { audit } from './audit';
import { threadsOf } from './remarks';
import { revisionContent } from './revision-content';
import { frozenContent, possibleReviewers, revisionsOf, type RevisionView } from './revisions';

/** Most changes of ions that the page lists. */
const MOST_CHANGES = 200;

/** The latest earlier revision that this person opened; looking is recorded as an act of its own. */
async function lastSeen(actorId: string, treeId: string, before: number): Promise<number | null> {
  const [row] = await database()
    .select({ number: revisions.number })
    .from(auditLog)
    .innerJoin(revisions, eq(revisions.id, auditLog.subjectId))
    .where(
      and(
        eq(auditLog.subjectKind, 'revision'),
        eq(auditLog.action, 'revision.opened'),
        eq(auditLog.actorId, actorId),
        eq(revisions.treeId, treeId),
        lt(revisions.number, before)
      )
    )
    .orderBy(desc(revisions.number))
    .limit(1);
  return row?.number ?? null;
}

async function recordLook(actor: Actor, groupId: string, treeId: string, revision: RevisionView): Promise<void> {
  const db = database();
  const [known] = await db
    .select({ id: auditLog.id })
    .from(auditLog)
    .where(
      and(
        eq(auditLog.subjectKind, 'revision'),
        eq(auditLog.subjectId, revision.id),
        eq(auditLog.action, 'revision.opened'),
        eq(auditLog.actorId, actor.id)
      )
    )
    .limit(1);
  if (known) return;
  await audit(db, actor, {
    groupId,
    action: 'revision.opened',
    subjectKind: 'revision',
    subjectId: revision.id,
    details: { treeId, number: revision.number }
  });
}

async function changesSince(treeId: string, since: number | null, content: RevisionContent) {
  const older = since === null ? null : await frozenContent(database(), treeId, since);
  if (!older) return null;
  const diff = diffRevisions(older.content, content);
  return {
    since: since!,
    same: isSame(diff),
    ...diff,
    ions: diff.ions.slice(0, MOST_CHANGES),
    ionCount: diff.ions.length
  };
}

function rights({ role, tree }: TreeAccess, actor: Actor, revision: RevisionView | null, latest: RevisionView | null) {
  const status: ReviewStatus = tree.status;
  const open = revision !== null && revision.status === 'in-review' && revision.number === latest?.number;
  const request = revision?.requests.find((r) => r.reviewerId === actor.id) ?? null;
  const mine = revision?.author?.id === actor.id;
  const wants = latest?.status === 'in-review' ? 'in-review' : status;
  return {
    ask: may(role, 'review.request') && accepts(wants, 'ask-for-review'),
    decide: may(role, 'review.decide') && open && !mine && request !== null,
    approve: may(role, 'review.decide') && open && !mine && request?.verdict === null,
    withdraw: may(role, 'review.request') && open && mine,
    remark: may(role, 'remark.write'),
    resolve: may(role, 'remark.resolve'),
    edit: may(role, 'tree.edit'),
    /** why there is no verdict form for somebody who gives verdicts. */
    whyNot: !may(role, 'review.decide') || !open ? null : mine ? 'own' : request === null ? 'not-asked' : null
  };
}

export interface ReviewChoice {
  /** revision to show; absent: the newest, or the tree as it stands where there is none. */
  revision?: number;
  /** earlier revision to compare with; absent: the one that this person last opened. */
  since?: number;
}

/**
 * Everything of the review screen. Guests see approved revisions only.
 * @throws ServiceError unauthenticated, not-found
 */
export async function reviewPage(actor: Actor | null, treeId: string, studyId: string, choice: ReviewChoice) {
  const access = await requireTree(actor, treeId, 'study.read', studyId);
  const { tree, study, group, role } = access;
  const reader = actor!;
  const insider = may(role, 'report.draft');
  const db = database();
  const all = await revisionsOf(db, treeId);
  const list = insider ? all : all.filter((revision) => revision.status === 'approved');
  const shown = choice.revision ? list.find((r) => r.number === choice.revision) : list[0];
  if (choice.revision && !shown)
    throw new ServiceError('not-found', `There is no revision ${choice.revision} open to you.`, 'Choose another one.');
  const frozen = shown ? await frozenContent(db, treeId, shown.number) : null;
  // Before the first revision the check list still helps the annotator: it is computed from the tree as it stands.
  const content = frozen?.content ?? (insider ? await revisionContent(db, tree) : null);
  const since = shown ? (choice.since ?? (await lastSeen(reader.id, treeId, shown.number))) : null;
  const threads = insider ? await threadsOf(db, treeId, reader.id, { open: true }) : [];
  if (shown) await recordLook(reader, group.id, treeId, shown);
  return {
    tree: {
      ...{ id: tree.id, name: tree.name, precursorMz: tree.precursorMz, adduct: tree.adduct, formula: tree.formula },
      ...{ status: tree.status, version: tree.version, confidenceLevel: tree.confidenceLevel }
    },
    study: { id: study.id, name: study.name },
    role,
    can: rights(access, reader, shown ?? null, all[0] ?? null),
    revisions: list,
    shown: shown ?? null,
    frozenTree: frozen?.content.tree ?? null,
    changedSince: shown !== undefined && shown.number === all[0]?.number && tree.version !== shown.treeVersion,
    changes: content && shown ? await changesSince(treeId, since, content) : null,
    checks: content && insider ? checkList(content) : [],
    spectra: content?.spectra.map(({ index, level, path }) => ({ index, level, path })) ?? [],
    threads,
    reviewers: may(role, 'review.request') ? await possibleReviewers(db, group.id, reader.id) : [],
    approvalsNeeded: group.defaults.approvalsNeeded,
    place: `${study.name} / ${tree.name}`
  };
}
export type ReviewPage = Awaited<ReturnType<typeof reviewPage>>;
