import { createHash } from 'node:crypto';
import { and, asc, eq, isNull } from 'drizzle-orm';
import { alias } from 'drizzle-orm/mysql-core';
import { ionMz, parseFormula } from '$lib/core/chem';
import { errorPpm } from '$lib/core/formula';
import { canonicalJson, fixed, significant } from '$lib/review/canonical';
import type { FrozenIon, FrozenRemark, FrozenSpectrum, FrozenTree, RevisionContent } from '$lib/review/content';
import type { Executor } from '../db/connection';
import { ions, remarks, runs, studies, users, type trees } from '../db/schema';
import { ServiceError } from '../errors';
import { spectraOf, type SpectrumRow } from './claim-context';
import { analyserKind, signedCharge, toleranceOf, treeIonFormula } from './tree-chemistry';

type TreeRow = typeof trees.$inferSelect;
const CANDIDATES = 5;

const ionFields = {
  id: ions.id,
  spectrum: ions.spectrum,
  mz: ions.mz,
  intensity: ions.intensity,
  scans: ions.scanCount,
  state: ions.state,
  formula: ions.formula,
  charge: ions.charge,
  errorPpm: ions.errorPpm,
  dbe: ions.dbe,
  oddElectron: ions.oddElectron,
  fromMz: ions.fromMz,
  fromFormula: ions.fromFormula,
  loss: ions.loss,
  lossRadical: ions.lossRadical,
  link: ions.link,
  isPrecursor: ions.isPrecursor,
  flag: ions.flag,
  score: ions.score,
  alternatives: ions.alternatives,
  reason: ions.reason,
  decidedBy: users.name
};

/** m/z of the ion by its formula, memoised: a tree names the same few hundred formulas again and again. */
function calculator() {
  const known = new Map<string, number>();
  return (formula: string | null, charge: number): number | null => {
    if (formula === null) return null;
    const key = `${formula} ${charge}`;
    let mz = known.get(key);
    if (mz === undefined) known.set(key, (mz = ionMz(parseFormula(formula), charge)));
    return fixed(mz, 6);
  };
}

async function frozenIons(tx: Executor, tree: TreeRow): Promise<FrozenIon[]> {
  const rows = await tx
    .select(ionFields)
    .from(ions)
    .leftJoin(users, eq(users.id, ions.decidedBy))
    .where(eq(ions.treeId, tree.id))
    .orderBy(asc(ions.spectrum), asc(ions.position));
  const calculated = calculator();
  return rows.map(({ alternatives, ...row }) => {
    const charge = signedCharge(tree, row.charge);
    const rival = alternatives.filter((a) => a.formula !== row.formula).sort((a, b) => b.score - a.score)[0];
    return {
      ...row,
      charge,
      mz: fixed(row.mz, 6),
      intensity: significant(row.intensity, 7),
      calculatedMz: calculated(row.formula, charge),
      errorPpm: fixed(row.errorPpm, 3),
      fromMz: fixed(row.fromMz, 6),
      score: fixed(row.score, 3),
      rival: rival ? { formula: rival.formula, score: fixed(rival.score, 3) } : null
    };
  });
}

const frozenSpectrum = (row: SpectrumRow, tree: TreeRow): FrozenSpectrum => ({
  index: row.index,
  level: row.level,
  path: row.path.map((mz) => fixed(mz, 6)),
  parent: row.parent,
  linkedBy: row.linkedBy,
  isolation: row.isolation,
  scanCount: row.scanIds.length,
  activations: row.activations,
  energies: row.energies,
  energyUnit: row.energyUnit === 'eV' || row.energyUnit === '%' ? row.energyUnit : null,
  analyser: analyserKind(row.analyser),
  tolerance: toleranceOf(tree, row.analyser),
  time: row.timeFirst === null || row.timeLast === null ? null : [fixed(row.timeFirst, 3), fixed(row.timeLast, 3)]
});

function frozenTree(tree: TreeRow): FrozenTree {
  const ionFormula = treeIonFormula(tree);
  const charge = tree.charge === null ? null : signedCharge(tree, tree.charge);
  const mz = ionFormula === null ? null : ionMz(parseFormula(ionFormula), charge ?? signedCharge(tree, 1));
  const { id, name, version, polarity, adduct, formula, formulaFixed, confidenceLevel, notes } = tree;
  return {
    ...{ id, name, version, polarity, adduct, formula, formulaFixed, confidenceLevel, notes, charge, ionFormula },
    precursorMz: fixed(tree.precursorMz, 6),
    calculatedMz: fixed(mz, 6),
    errorPpm: mz === null ? null : fixed(errorPpm(tree.precursorMz, mz), 3),
    explained: fixed(tree.explained, 4)
  };
}

async function openThreads(tx: Executor, treeId: string): Promise<FrozenRemark[]> {
  const author = alias(users, 'author');
  const rows = await tx
    .select({ remark: remarks, author: author.name })
    .from(remarks)
    .leftJoin(author, eq(author.id, remarks.authorId))
    .where(and(eq(remarks.treeId, treeId), isNull(remarks.resolvedAt)))
    .orderBy(asc(remarks.createdAt), asc(remarks.id));
  const written = (row: (typeof rows)[number]) => ({
    author: row.author ?? 'somebody who left',
    at: row.remark.createdAt.toISOString(),
    body: row.remark.body
  });
  return rows
    .filter(({ remark }) => remark.threadId === null)
    .map((row) => {
      const { id, anchor, spectrum, ionId, mz } = row.remark;
      const replies = rows.filter((other) => other.remark.threadId === id).map(written);
      return { id, anchor, spectrum, ionId, mz: fixed(mz, 6), ...written(row), replies };
    });
}

/** Everything of a tree that a revision freezes, as it stands in this transaction. */
export async function revisionContent(tx: Executor, tree: TreeRow): Promise<RevisionContent> {
  const [place] = await tx
    .select({ study: studies, run: runs })
    .from(runs)
    .innerJoin(studies, eq(studies.id, runs.studyId))
    .where(eq(runs.id, tree.runId));
  if (!place) throw new ServiceError('not-found', 'The run of this tree is gone.', 'Go back to the study.');
  const { run, study } = place;
  return {
    format: 'rivenmark-tree',
    formatVersion: 1,
    tree: frozenTree(tree),
    study: { id: study.id, name: study.name },
    run: {
      ...{ id: run.id, fileName: run.fileName, sha256: run.sha256 },
      instrument: run.info?.instrument ?? null,
      ionSource: run.info?.ionSource ?? null,
      startTime: run.info?.startTime ?? null,
      scans: run.info?.scans ?? {}
    },
    settings: tree.settings,
    spectra: (await spectraOf(tx, tree.id)).map((row) => frozenSpectrum(row, tree)),
    ions: await frozenIons(tx, tree),
    candidates: tree.candidates
      .slice(0, CANDIDATES)
      .map(({ rank, formula, adduct, errorPpm: error, dbe, score, terms, explainedIntensity }) => ({
        ...{ rank, formula, adduct, dbe },
        errorPpm: fixed(error, 3),
        score: fixed(score, 3),
        terms: Object.fromEntries(Object.entries(terms).map(([name, value]) => [name, fixed(value, 3)])),
        explainedIntensity: fixed(explainedIntensity, 4)
      })),
    remarks: await openThreads(tx, tree.id)
  };
}

/** SHA-256 of UTF-8 text, 64 hex digits. */
export const sha256 = (text: string): string => createHash('sha256').update(text, 'utf8').digest('hex');

/** The text of a revision and the hash that names it. */
export function sealed(content: RevisionContent): { text: string; hash: string } {
  const text = canonicalJson(content);
  return { text, hash: sha256(text) };
}

/**
 * Reads a stored revision back.
 * @throws Error when the text does not fit its hash: the database was changed by hand
 */
export function openSealed(text: string, hash: string): RevisionContent {
  if (sha256(text) !== hash) throw new Error(`a stored revision does not fit its hash ${hash}`);
  return JSON.parse(text) as RevisionContent;
}
