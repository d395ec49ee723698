import { formatFormula, ionFormulaOf, parseAdduct, parseFormula } from '$lib/core/chem';
import { toleranceFor } from '$lib/core/formula';
import type { AnalyserKind, Tolerance } from '$lib/core/model';
import type { trees } from '../db/schema';

type TreeRow = typeof trees.$inferSelect;

/** Composition of the tree's precursor ion in Hill order; null while formula or ion type is unknown. */
export function treeIonFormula(tree: Pick<TreeRow, 'formula' | 'adduct'>): string | null {
  if (!tree.formula || !tree.adduct) return null;
  const ion = ionFormulaOf(parseFormula(tree.formula), parseAdduct(tree.adduct));
  return ion && formatFormula(ion);
}

const KINDS: readonly string[] = [
  'orbitrap',
  'ft-icr',
  'tof',
  'quadrupole',
  'ion-trap',
  'sector',
  'unknown'
] satisfies AnalyserKind[];

/** Analyser name of the database as the core's kind. */
export const analyserKind = (name: string): AnalyserKind => (KINDS.includes(name) ? (name as AnalyserKind) : 'unknown');

/** The search window that holds for a spectrum: the tree's own, else that of the analyser. */
export const toleranceOf = (tree: Pick<TreeRow, 'settings'>, analyser: string): Tolerance =>
  tree.settings.tolerance ?? toleranceFor(analyserKind(analyser));

/** Signed charge number of an ion of the tree; stored numbers may lack the sign. */
export const signedCharge = (tree: Pick<TreeRow, 'polarity'>, charge: number): number =>
  (tree.polarity === 'negative' ? -1 : 1) * Math.max(1, Math.abs(charge));
