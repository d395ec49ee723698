import { and, desc, eq, gte, inArray, lte, sql } from 'drizzle-orm';
import { CARBON_ISOTOPE_SPACING, elementOf, parseFormula } from '$lib/core/chem';
import { windowAt } from '$lib/core/formula';
import { ionIsotopePeaks } from '$lib/core/isotope';
import type { BreakdownPoint, HistoryEntry, IonDetail, Sighting } from '$lib/schema/workbench';
import { requireTree, type Actor } from '../auth/authorize';
import { database } from '../db';
import { claimHistory, ions, scans, users, type trees } from '../db/schema';
import { unpackPeaks } from '../db/packing';
import { ServiceError } from '../errors';
import { spectraOf, type SpectrumRow } from './claim-context';
import type { IonRow } from './claim-state';
import { breakdownOf, energyOf } from './breakdown';
import { toleranceOf } from './tree-chemistry';

type TreeRow = typeof trees.$inferSelect;
/** Scans read for one breakdown curve at most. */
const MAX_SCANS = 400;

async function historyOf(ionId: number): Promise<HistoryEntry[]> {
  const rows = await database()
    .select({ entry: claimHistory, who: users.name })
    .from(claimHistory)
    .leftJoin(users, eq(users.id, claimHistory.actorId))
    .where(eq(claimHistory.ionId, ionId))
    .orderBy(desc(claimHistory.id));
  return rows.map(({ entry, who }) => ({
    id: entry.id,
    action: entry.action,
    who: who ?? (entry.action === 'proposed' ? 'Rivenmark' : 'a former member'),
    at: entry.createdAt.toISOString(),
    before: { state: entry.before.state, formula: entry.before.formula },
    after: { state: entry.after.state, formula: entry.after.formula },
    reason: entry.reason
  }));
}

/** The strongest ion within the window in every spectrum of the tree. */
async function sightings(tree: TreeRow, spectra: SpectrumRow[], mz: number, window: number): Promise<Sighting[]> {
  const db = database();
  const [near, bases] = await Promise.all([
    db
      .select()
      .from(ions)
      .where(and(eq(ions.treeId, tree.id), gte(ions.mz, mz - window), lte(ions.mz, mz + window)))
      .orderBy(desc(ions.intensity)),
    db
      .select({ spectrum: ions.spectrum, base: sql<number>`max(${ions.intensity})`.mapWith(Number) })
      .from(ions)
      .where(eq(ions.treeId, tree.id))
      .groupBy(ions.spectrum)
  ]);
  const base = new Map(bases.map((row) => [row.spectrum, row.base]));
  return spectra.flatMap((spectrum): Sighting[] => {
    const ion = near.find((row) => row.spectrum === spectrum.index);
    if (!ion) return [];
    const { id: ionId, version, mz: found, intensity, scanCount, state, formula } = ion;
    const relative = (100 * intensity) / (base.get(spectrum.index) || 1);
    const where = { spectrum: spectrum.index, scans: scanCount, scanTotal: spectrum.scanIds.length };
    return [{ ...where, ionId, version, mz: found, intensity, relative, state, formula }];
  });
}

/** Share of the ion in each scan's current, averaged by energy; null unless two energies were measured. */
async function breakdown(
  tree: TreeRow,
  spectra: SpectrumRow[],
  own: SpectrumRow,
  mz: number,
  window: number
): Promise<IonDetail['breakdown']> {
  const same = spectra.filter(
    (s) => s.level === own.level && s.path.every((at, i) => Math.abs(at - own.path[i]) < 0.02)
  );
  const ids = same.flatMap((s) => s.scanIds).slice(0, MAX_SCANS);
  if (!ids.length || new Set(same.flatMap((s) => s.energies)).size < 2) return null;
  const rows = await database()
    .select({ header: scans.header, peaks: scans.peaks })
    .from(scans)
    .where(and(eq(scans.runId, tree.runId), inArray(scans.nativeId, ids)));
  const points: BreakdownPoint[] = breakdownOf(
    rows.map((row) => ({ energy: energyOf(row.header), peaks: unpackPeaks(row.peaks) })),
    mz,
    window
  );
  const unit = same.find((s) => s.energyUnit)?.energyUnit;
  return points.length > 1 && points.some((p) => p.share > 0)
    ? { unit: unit === 'eV' || unit === '%' ? unit : null, points }
    : null;
}

/** m/z distances at which a second isotope shows, by the ion's elements; carbon alone while no formula is known. */
function isotopeDistances(ion: IonRow): { label: string; delta: number; expected: number | null }[] {
  const charge = Math.max(1, Math.abs(ion.charge));
  const composition = ion.formula ? parseFormula(ion.formula) : null;
  const pattern = composition ? ionIsotopePeaks(composition, ion.charge || 1, 1e-3) : [];
  const near = (delta: number) => {
    const base = pattern.find((p) => p.offset === 0);
    const peak = base && pattern.find((p) => p.offset > 0 && Math.abs(p.mz - base.mz - delta) < 0.006);
    return base && peak ? (100 * peak.relative) / base.relative : null;
  };
  const heavy = (['S', 'Cl', 'Br'] as const).filter((symbol) => !composition || (composition[symbol] ?? 0) > 0);
  const found = [1, 2].map((n) => ({
    label: n === 1 ? '13C' : `13C${n}`,
    delta: (n * CARBON_ISOTOPE_SPACING) / charge
  }));
  for (const symbol of heavy) {
    const isotopes = elementOf(symbol)?.isotopes ?? [];
    const [light, second] = [isotopes[0], isotopes.find((i) => i.nucleons === isotopes[0].nucleons + 2)];
    if (second) found.push({ label: `${second.nucleons}${symbol}`, delta: (second.mass - light.mass) / charge });
  }
  return found.map((d) => ({ ...d, expected: near(d.delta) }));
}

async function isotopePeaks(ion: IonRow, window: number): Promise<IonDetail['isotopes']> {
  const rows = await database()
    .select({ mz: ions.mz, intensity: ions.intensity })
    .from(ions)
    .where(
      and(
        eq(ions.treeId, ion.treeId),
        eq(ions.spectrum, ion.spectrum),
        gte(ions.mz, ion.mz + 0.2),
        lte(ions.mz, ion.mz + 2.5)
      )
    );
  return isotopeDistances(ion).flatMap(({ label, delta, expected }) => {
    const peak = rows.find((row) => Math.abs(row.mz - ion.mz - delta) <= Math.min(window, 0.3));
    return peak ? [{ label, mz: peak.mz, relative: (100 * peak.intensity) / ion.intensity, expected }] : [];
  });
}

/**
 * Everything about one ion that the inspector shows beyond its row.
 * @throws ServiceError unauthenticated, forbidden, not-found when the ion is not of this tree
 */
export async function ionDetail(actor: Actor | null, treeId: string, ionId: number): Promise<IonDetail> {
  const { tree } = await requireTree(actor, treeId, 'study.read');
  const db = database();
  const [row] = await db
    .select({ ion: ions, decider: users.name })
    .from(ions)
    .leftJoin(users, eq(users.id, ions.decidedBy))
    .where(and(eq(ions.id, ionId), eq(ions.treeId, treeId)));
  const spectra = await spectraOf(db, treeId);
  const own = row && spectra.find((s) => s.index === row.ion.spectrum);
  if (!row || !own) throw new ServiceError('not-found', 'There is no such ion in this tree.', 'Reload the tree.');
  const { ion, decider } = row;
  const window = windowAt(toleranceOf(tree, own.analyser), ion.mz);
  const [history, seen, curve, isotopes] = await Promise.all([
    historyOf(ionId),
    sightings(tree, spectra, ion.mz, window),
    breakdown(tree, spectra, own, ion.mz, window),
    isotopePeaks(ion, window)
  ]);
  return {
    id: ion.id,
    version: ion.version,
    alternatives: ion.alternatives,
    terms: ion.terms,
    decidedBy: decider,
    decidedAt: ion.decidedAt?.toISOString() ?? null,
    reason: ion.reason,
    history,
    seen,
    breakdown: curve,
    isotopes,
    window: { mz: window, ppm: (window / ion.mz) * 1e6 }
  };
}
