import { asc, eq } from 'drizzle-orm';
import { randomUUID } from 'node:crypto';
import type { AnalyserKind, AssembledTree, TreeSpectrum } from '$lib/core/model';
import type { TreeSettings } from '$lib/schema/tree';
import type { Executor } from '../db/connection';
import { packPeaks, unpackPeaks } from '../db/packing';
import { ions, trees, treeSpectra } from '../db/schema';
import { analyserKind } from './tree-chemistry';

const BATCH = 1000;

export interface NewTree {
  id: string;
  studyId: string;
  runId: string;
  name: string;
  settings: TreeSettings;
  createdBy: string | null;
}

const spectrumRow = (treeId: string, spectrum: TreeSpectrum): typeof treeSpectra.$inferInsert => ({
  id: randomUUID(),
  treeId,
  index: spectrum.index,
  level: spectrum.level,
  path: spectrum.path,
  parent: spectrum.parent,
  linkedBy: spectrum.linkedBy,
  isolation: spectrum.isolation,
  scanIds: spectrum.scanIds,
  activations: spectrum.activations,
  energies: spectrum.energies,
  energyUnit: spectrum.energyUnit,
  analyser: spectrum.analyser,
  timeFirst: spectrum.time?.[0] ?? null,
  timeLast: spectrum.time?.[1] ?? null
});

function ionRows(treeId: string, { index, peaks, scanCounts }: TreeSpectrum): (typeof ions.$inferInsert)[] {
  return Array.from(peaks.mz, (mz, position) => ({
    treeId,
    spectrum: index,
    position,
    mz,
    intensity: peaks.intensity[position],
    scanCount: scanCounts[position],
    charge: 1,
    terms: {},
    alternatives: []
  }));
}

/** Writes an assembled tree as rows, every ion open. Call inside a transaction. */
export async function insertTree(tx: Executor, row: NewTree, tree: AssembledTree): Promise<void> {
  await tx.insert(trees).values({
    ...row,
    precursorMz: tree.precursorMz,
    charge: tree.charge,
    polarity: tree.polarity,
    candidates: [],
    notes: tree.notes,
    ms1: tree.ms1 && packPeaks(tree.ms1),
    updatedAt: new Date()
  });
  if (tree.spectra.length)
    await tx.insert(treeSpectra).values(tree.spectra.map((spectrum) => spectrumRow(row.id, spectrum)));
  const rows = tree.spectra.flatMap((spectrum) => ionRows(row.id, spectrum));
  for (let i = 0; i < rows.length; i += BATCH) await tx.insert(ions).values(rows.slice(i, i + BATCH));
}

type IonCore = Pick<typeof ions.$inferSelect, 'spectrum' | 'mz' | 'intensity' | 'scanCount'>;

function toSpectrum(row: typeof treeSpectra.$inferSelect, own: IonCore[]): TreeSpectrum {
  const analyser: AnalyserKind = analyserKind(row.analyser);
  return {
    index: row.index,
    level: row.level,
    path: row.path,
    parent: row.parent,
    linkedBy: row.linkedBy,
    isolation: row.isolation,
    scanIds: row.scanIds,
    activations: row.activations,
    energies: row.energies,
    energyUnit: row.energyUnit === 'eV' || row.energyUnit === '%' ? row.energyUnit : null,
    analyser,
    time: row.timeFirst !== null && row.timeLast !== null ? [row.timeFirst, row.timeLast] : null,
    peaks: {
      mz: Float64Array.from(own, (ion) => ion.mz),
      intensity: Float64Array.from(own, (ion) => ion.intensity)
    },
    scanCounts: Uint16Array.from(own, (ion) => ion.scanCount)
  };
}

/**
 * Rebuilds the core's tree from its rows: the inverse of {@link insertTree}, with peaks in the order of `ions.position`.
 * @returns null when there is no such tree
 */
export async function loadAssembledTree(tx: Executor, treeId: string): Promise<AssembledTree | null> {
  const [tree] = await tx.select().from(trees).where(eq(trees.id, treeId));
  if (!tree) return null;
  const spectra = await tx
    .select()
    .from(treeSpectra)
    .where(eq(treeSpectra.treeId, treeId))
    .orderBy(asc(treeSpectra.index));
  const rows = await tx
    .select({ spectrum: ions.spectrum, mz: ions.mz, intensity: ions.intensity, scanCount: ions.scanCount })
    .from(ions)
    .where(eq(ions.treeId, treeId))
    .orderBy(asc(ions.spectrum), asc(ions.position));
  const own = new Map<number, IonCore[]>();
  for (const row of rows) {
    const list = own.get(row.spectrum);
    if (list) list.push(row);
    else own.set(row.spectrum, [row]);
  }
  return {
    precursorMz: tree.precursorMz,
    charge: tree.charge,
    polarity: tree.polarity,
    spectra: spectra.map((spectrum) => toSpectrum(spectrum, own.get(spectrum.index) ?? [])),
    ms1: tree.ms1 && unpackPeaks(tree.ms1),
    notes: tree.notes
  };
}
