import { and, eq, sql } from 'drizzle-orm';
import { windowAt } from '$lib/core/formula';
import type { Executor } from '../db/connection';
import { ions, type trees } from '../db/schema';
import { lossBetween } from './claim-formula';
import type { SpectrumRow } from './claim-context';
import type { IonRow } from './claim-state';
import { toleranceOf } from './tree-chemistry';

/**
 * After an ion took another formula, the losses of the ions that hang on it are worked out again, so that no figure
 * keeps a loss that the formulas no longer give. Ions that cannot come from the new formula keep their claim and lose
 * the link. @returns the ids changed; their versions have risen
 */
export async function rehang(
  tx: Executor,
  tree: typeof trees.$inferSelect,
  spectra: readonly SpectrumRow[],
  ion: IonRow,
  before: string
): Promise<number[]> {
  const formula = ion.formula;
  if (!formula || formula === before) return [];
  const own = spectra.find((s) => s.index === ion.spectrum);
  const window = Math.max(windowAt(toleranceOf(tree, own?.analyser ?? 'unknown'), ion.mz), 0.02);
  const opened = spectra.filter(
    (s) => s.parent === ion.spectrum && Math.abs((s.path.at(-1) ?? Infinity) - ion.mz) <= window
  );
  const places = new Set([ion.spectrum, ...opened.map((s) => s.index)]);
  const hanging = await tx
    .select()
    .from(ions)
    .where(and(eq(ions.treeId, tree.id), eq(ions.fromFormula, before)))
    .for('update');
  const changed: number[] = [];
  for (const child of hanging) {
    if (!places.has(child.spectrum) || Math.abs((child.fromMz ?? Infinity) - ion.mz) > window || !child.formula)
      continue;
    const step = lossBetween(formula, child.formula);
    const link = child.spectrum === ion.spectrum && !ion.isPrecursor ? ('inferred' as const) : ('measured' as const);
    await tx
      .update(ions)
      .set({
        fromFormula: formula,
        loss: step?.loss ?? null,
        lossRadical: step?.lossRadical ?? false,
        link: step ? link : null,
        version: sql`${ions.version} + 1`
      })
      .where(eq(ions.id, child.id));
    changed.push(child.id);
  }
  return changed;
}
