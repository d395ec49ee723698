import { and, asc, eq, inArray, ne } from 'drizzle-orm';
import { windowAt } from '$lib/core/formula';
import type { Executor } from '../db/connection';
import { ions, treeSpectra, type trees } from '../db/schema';
import type { ClaimContext, HoldingIon } from './claim-formula';
import type { IonRow } from './claim-state';
import { signedCharge, toleranceOf, treeIonFormula } from './tree-chemistry';

type TreeRow = typeof trees.$inferSelect;
export type SpectrumRow = typeof treeSpectra.$inferSelect;

/** The spectra of a tree by their index. */
export async function spectraOf(tx: Executor, treeId: string): Promise<SpectrumRow[]> {
  return tx.select().from(treeSpectra).where(eq(treeSpectra.treeId, treeId)).orderBy(asc(treeSpectra.index));
}

/**
 * The ion that was isolated for a spectrum, with its formula: the intact precursor seen in the spectrum itself, else
 * the ion of the spectrum above at the isolated m/z, else the precursor ion of the tree for an MS2 spectrum.
 */
export async function isolatedIon(tx: Executor, tree: TreeRow, spectrum: SpectrumRow): Promise<HoldingIon | null> {
  const mz = spectrum.path.at(-1) ?? tree.precursorMz;
  const places = [spectrum.index, ...(spectrum.parent === null ? [] : [spectrum.parent])];
  const near = await tx
    .select({ mz: ions.mz, formula: ions.formula, isPrecursor: ions.isPrecursor, spectrum: ions.spectrum })
    .from(ions)
    .where(and(eq(ions.treeId, tree.id), inArray(ions.spectrum, places), ne(ions.state, 'rejected')));
  const window = Math.max(windowAt(toleranceOf(tree, spectrum.analyser), mz), 0.02);
  const found = near
    .filter((ion) => ion.formula && Math.abs(ion.mz - mz) <= window)
    .filter((ion) => ion.spectrum === spectrum.parent || ion.isPrecursor)
    .sort((a, b) => Number(b.isPrecursor) - Number(a.isPrecursor) || Math.abs(a.mz - mz) - Math.abs(b.mz - mz))[0];
  if (found?.formula) return { mz: found.mz, formula: found.formula };
  const whole = spectrum.level === 2 ? treeIonFormula(tree) : null;
  return whole ? { mz: tree.precursorMz, formula: whole } : null;
}

/** Everything that a claim about the ion is checked against. */
export async function claimContext(
  tx: Executor,
  tree: TreeRow,
  spectrum: SpectrumRow,
  ion: IonRow,
  reason: string | null
): Promise<ClaimContext> {
  return {
    mz: ion.mz,
    charge: signedCharge(tree, ion.charge),
    tolerance: toleranceOf(tree, spectrum.analyser),
    treeIon: treeIonFormula(tree),
    isolated: await isolatedIon(tx, tree, spectrum),
    from: ion.fromFormula && ion.fromMz !== null ? { mz: ion.fromMz, formula: ion.fromFormula } : null,
    alternatives: ion.alternatives,
    reason
  };
}
