import { and, asc, count, desc, eq, inArray, isNull } from 'drizzle-orm';
import { may } from '$lib/review/permissions';
import type { Role } from '$lib/schema/group';
import type { SpectrumView, TreeFacts, WorkbenchView } from '$lib/schema/workbench';
import { requireTree, type Actor } from '../auth/authorize';
import { database } from '../db';
import { jobs, remarks, revisions, runs, type trees } from '../db/schema';
import { unpackPeaks } from '../db/packing';
import { analyserKind, treeIonFormula } from './tree-chemistry';
import { spectraOf, type SpectrumRow } from './claim-context';
import { ionColumns } from './ion-columns';

const spectrumView = (row: SpectrumRow): SpectrumView => ({
  index: row.index,
  level: row.level,
  path: row.path,
  parent: row.parent,
  linkedBy: row.linkedBy,
  isolation: row.isolation,
  activations: row.activations,
  energies: row.energies,
  energyUnit: row.energyUnit === 'eV' || row.energyUnit === '%' ? row.energyUnit : null,
  time: row.timeFirst === null || row.timeLast === null ? null : [row.timeFirst, row.timeLast],
  analyser: analyserKind(row.analyser),
  scanCount: row.scanIds.length
});

/** Open threads by what they are anchored at. */
async function openRemarks(treeId: string): Promise<WorkbenchView['remarks']> {
  const rows = await database()
    .select({ anchor: remarks.anchor, spectrum: remarks.spectrum, ionId: remarks.ionId, n: count() })
    .from(remarks)
    .where(and(eq(remarks.treeId, treeId), isNull(remarks.threadId), isNull(remarks.resolvedAt)))
    .groupBy(remarks.anchor, remarks.spectrum, remarks.ionId);
  const found: WorkbenchView['remarks'] = { open: 0, tree: 0, spectra: {}, ions: {} };
  for (const { anchor, spectrum, ionId, n } of rows) {
    found.open += n;
    if (ionId !== null) found.ions[ionId] = (found.ions[ionId] ?? 0) + n;
    else if (anchor === 'spectrum' && spectrum !== null) found.spectra[spectrum] = (found.spectra[spectrum] ?? 0) + n;
    else found.tree += n;
  }
  return found;
}

async function treeFacts(tree: typeof trees.$inferSelect): Promise<TreeFacts> {
  const db = database();
  const [[run], [revision]] = await Promise.all([
    db.select({ fileName: runs.fileName }).from(runs).where(eq(runs.id, tree.runId)),
    db
      .select({ number: revisions.number, status: revisions.status })
      .from(revisions)
      .where(eq(revisions.treeId, tree.id))
      .orderBy(desc(revisions.number))
      .limit(1)
  ]);
  const { id, name, studyId, runId, precursorMz, charge, polarity, adduct, formula, formulaFixed } = tree;
  const { settings, notes, explained, status, confidenceLevel, version } = tree;
  return {
    ...{ id, name, studyId, runId, precursorMz, charge, polarity, adduct, formula, formulaFixed },
    ...{ settings, notes, explained, status, confidenceLevel, version },
    runName: run?.fileName ?? '',
    ionFormula: treeIonFormula(tree),
    suggestedAt: tree.suggestedAt?.toISOString() ?? null,
    revision: revision ?? null
  };
}

const rights = (role: Role): WorkbenchView['can'] => ({
  edit: may(role, 'tree.edit'),
  decide: may(role, 'claim.decide'),
  remark: may(role, 'remark.write'),
  requestReview: may(role, 'review.request'),
  review: may(role, 'review.decide'),
  report: may(role, 'report.draft')
});

function peaks(packed: Buffer | null): WorkbenchView['ms1'] {
  if (!packed) return null;
  const { mz, intensity } = unpackPeaks(packed);
  return { mz: [...mz], intensity: [...intensity] };
}

/**
 * The whole tree as the workbench draws it, without the ions' alternatives and history (see ionDetail).
 * @throws ServiceError unauthenticated, not-found, forbidden
 */
export async function workbenchView(actor: Actor | null, treeId: string, studyId?: string): Promise<WorkbenchView> {
  const { tree, role } = await requireTree(actor, treeId, 'study.read', studyId);
  const db = database();
  const [facts, spectra, columns, open, running] = await Promise.all([
    treeFacts(tree),
    spectraOf(db, treeId),
    ionColumns(db, treeId),
    openRemarks(treeId),
    db
      .select({ id: jobs.id, kind: jobs.kind, state: jobs.state, progress: jobs.progress })
      .from(jobs)
      .where(and(eq(jobs.subjectId, treeId), inArray(jobs.state, ['queued', 'running'])))
      .orderBy(asc(jobs.createdAt))
  ]);
  return {
    tree: facts,
    ms1: peaks(tree.ms1),
    spectra: spectra.map(spectrumView),
    ions: columns,
    candidates: tree.candidates,
    remarks: open,
    role,
    can: rights(role),
    jobs: running
  };
}

/** Name and study of a tree, for the page around the workbench. @throws ServiceError unauthenticated, not-found */
export async function workbenchHead(actor: Actor | null, treeId: string, studyId: string) {
  const { tree, study } = await requireTree(actor, treeId, 'study.read', studyId);
  return { treeId: tree.id, treeName: tree.name, studyId: study.id, place: `${study.name} / ${tree.name}` };
}
