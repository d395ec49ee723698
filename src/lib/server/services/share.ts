import { createHash, randomBytes } from 'node:crypto';
import { and, desc, eq, isNull, sql } from 'drizzle-orm';
import { may } from '$lib/review/permissions';
import { reportOptions } from '$lib/review/report/options';
import { shareTokenSchema, type ShareLinkView } from '$lib/schema/review';
import { requireStudy, requireTree, type Actor } from '../auth/authorize';
import { config } from '../config';
import { database } from '../db';
import { revisions, shareLinks, studies, trees, users } from '../db/schema';
import { ServiceError } from '../errors';
import type { PrintedReport } from '../report/printed';
import { audit } from './audit';
import { approvedReport } from './report';

const DAY = 86_400_000;
const idOf = (secret: string): string => createHash('sha256').update(secret).digest('hex');

type LinkRow = typeof shareLinks.$inferSelect;

async function issue(
  actor: Actor,
  place: { groupId: string; studyId: string; treeId: string | null },
  days: number
): Promise<{ id: string; url: string; expiresAt: string }> {
  const secret = randomBytes(32).toString('base64url');
  const id = idOf(secret);
  const expiresAt = new Date(Date.now() + days * DAY);
  const { groupId, studyId, treeId } = place;
  await database().transaction(async (tx) => {
    await tx.insert(shareLinks).values({ id, studyId, treeId, createdBy: actor.id, expiresAt });
    await audit(tx, actor, {
      groupId,
      action: 'share-link.created',
      subjectKind: 'share-link',
      subjectId: id,
      details: { studyId, treeId, expiresAt: expiresAt.toISOString() }
    });
  });
  return { id, url: `${new URL(config().ORIGIN).origin}/shared/${secret}`, expiresAt: expiresAt.toISOString() };
}

/** Makes a read-only link to the approved revisions of a whole study. The address is shown once. @throws ServiceError forbidden */
export async function shareStudy(actor: Actor | null, studyId: string, days: number) {
  const { group } = await requireStudy(actor, studyId, 'study.share');
  return issue(actor!, { groupId: group.id, studyId, treeId: null }, days);
}

/**
 * Makes a read-only link to one approved tree. The address is shown once; only its SHA-256 is stored.
 * @throws ServiceError forbidden, conflict without an approved revision
 */
export async function shareTree(actor: Actor | null, treeId: string, studyId: string, days: number) {
  const { group } = await requireTree(actor, treeId, 'study.share', studyId);
  const [approved] = await database()
    .select({ id: revisions.id })
    .from(revisions)
    .where(and(eq(revisions.treeId, treeId), eq(revisions.status, 'approved')))
    .limit(1);
  if (!approved) throw new ServiceError('conflict', 'Only an approved tree can be shared.', 'Have it approved first.');
  return issue(actor!, { groupId: group.id, studyId, treeId }, days);
}

const stateOf = (link: LinkRow): ShareLinkView['state'] =>
  link.revokedAt ? 'revoked' : link.expiresAt <= new Date() ? 'expired' : 'open';

/** The links of a study for whoever may make them; null for everybody else who reads the study. @throws ServiceError */
export async function studyShareLinks(actor: Actor | null, studyId: string): Promise<ShareLinkView[] | null> {
  const { role } = await requireStudy(actor, studyId, 'study.read');
  return may(role, 'study.share') ? listShareLinks(actor, studyId) : null;
}

/** Links of a study, or of one of its trees together with those of the whole study; newest first. @throws ServiceError forbidden */
export async function listShareLinks(actor: Actor | null, studyId: string, treeId?: string): Promise<ShareLinkView[]> {
  await requireStudy(actor, studyId, 'study.share');
  const rows = await database()
    .select({ link: shareLinks, tree: trees.name, by: users.name })
    .from(shareLinks)
    .leftJoin(trees, eq(trees.id, shareLinks.treeId))
    .leftJoin(users, eq(users.id, shareLinks.createdBy))
    .where(eq(shareLinks.studyId, studyId))
    .orderBy(desc(shareLinks.createdAt));
  return rows
    .filter(({ link }) => treeId === undefined || link.treeId === null || link.treeId === treeId)
    .map(({ link, tree, by }) => ({
      ...{ id: link.id, treeId: link.treeId, treeName: tree, createdBy: by, state: stateOf(link) },
      createdAt: link.createdAt.toISOString(),
      expiresAt: link.expiresAt.toISOString()
    }));
}

/** Ends a link at once. Repeating it changes nothing. @throws ServiceError forbidden, not-found */
export async function revokeShareLink(actor: Actor | null, studyId: string, linkId: string): Promise<void> {
  const { group } = await requireStudy(actor, studyId, 'study.share');
  await database().transaction(async (tx) => {
    const own = and(eq(shareLinks.id, linkId), eq(shareLinks.studyId, studyId));
    const [link] = await tx.select().from(shareLinks).where(own).for('update');
    if (!link) throw new ServiceError('not-found', 'This study has no such link.', 'Reload the page.');
    if (link.revokedAt) return;
    await tx
      .update(shareLinks)
      .set({ revokedAt: new Date() })
      .where(and(own, isNull(shareLinks.revokedAt)));
    await audit(tx, actor, {
      groupId: group.id,
      action: 'share-link.revoked',
      subjectKind: 'share-link',
      subjectId: linkId,
      details: { studyId, treeId: link.treeId }
    });
  });
}

/** The link that a secret opens. One message for unknown, expired and revoked, so that guessing learns nothing. */
async function openLink(secret: string): Promise<LinkRow> {
  const known = shareTokenSchema.safeParse(secret).success;
  const [link] = known
    ? await database()
        .select()
        .from(shareLinks)
        .where(eq(shareLinks.id, idOf(secret)))
    : [];
  if (!link || stateOf(link) !== 'open')
    throw new ServiceError(
      'gone',
      'This link does not open anything: it was withdrawn, has expired, or was copied incompletely.',
      'Ask the person who gave it to you for a new one.'
    );
  return link;
}

export interface SharedTreeRow {
  id: string;
  name: string;
  precursorMz: number;
  adduct: string | null;
  formula: string | null;
  revision: number;
}
export type SharedView =
  | { kind: 'tree'; study: string; report: PrintedReport['report']; back: boolean }
  | { kind: 'study'; study: string; description: string; trees: SharedTreeRow[] };

/** Approved trees of a study with the facts that were frozen, not those of later drafts; by precursor m/z. */
async function approvedTrees(studyId: string): Promise<SharedTreeRow[]> {
  const frozen = (path: string) => sql<string | null>`json_value(${revisions.content}, ${path})`;
  const rows = await database()
    .select({
      id: trees.id,
      name: frozen('$.tree.name'),
      precursorMz: frozen('$.tree.precursorMz'),
      adduct: frozen('$.tree.adduct'),
      formula: frozen('$.tree.formula'),
      revision: revisions.number
    })
    .from(revisions)
    .innerJoin(trees, eq(trees.id, revisions.treeId))
    .where(
      and(
        eq(trees.studyId, studyId),
        sql`${revisions.number} = (select max(r.number) from ${revisions} r where r.tree_id = ${trees.id} and r.status = 'approved')`
      )
    );
  return rows
    .map((row) => ({ ...row, name: row.name ?? '', precursorMz: Number(row.precursorMz) }))
    .sort((a, b) => a.precursorMz - b.precursorMz || (a.id < b.id ? -1 : 1));
}

/**
 * What a reader without an account sees: the report of the newest approved revision, or the list of the study's
 * approved trees. Nothing else of the study is reachable through a link.
 * @param query choices of the report; `tree` names one tree of a shared study
 * @throws ServiceError gone, not-found
 */
export async function openShared(secret: string, query: URLSearchParams): Promise<SharedView> {
  const link = await openLink(secret);
  const [study] = await database().select().from(studies).where(eq(studies.id, link.studyId));
  const wanted = link.treeId ?? query.get('tree');
  if (!wanted)
    return { kind: 'study', study: study.name, description: study.description, trees: await approvedTrees(study.id) };
  const [tree] = await database()
    .select({ id: trees.id })
    .from(trees)
    .where(and(eq(trees.id, wanted), eq(trees.studyId, link.studyId)));
  const printed = tree ? await approvedReport(tree.id, { ...reportOptions(query), revision: undefined }) : null;
  if (!printed)
    throw new ServiceError(
      'not-found',
      'No approved tree of this name is shared by this link.',
      'Go back to the list.'
    );
  return { kind: 'tree', study: study.name, report: printed.report, back: link.treeId === null };
}
