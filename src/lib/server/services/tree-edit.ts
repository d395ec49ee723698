import { eq } from 'drizzle-orm';
import {
  formatFormula,
  ionFormulaOf,
  ionMz,
  parseAdduct,
  parseElementRanges,
  parseFormula,
  type Adduct
} from '$lib/core/chem';
import { CoreError } from '$lib/core/errors';
import { errorPpm } from '$lib/core/formula';
import type { TreeSettings } from '$lib/schema/tree';
import type { TreePatch } from '$lib/schema/workbench';
import { requireTree, type Actor } from '../auth/authorize';
import { database } from '../db';
import { treeSpectra, trees } from '../db/schema';
import { ServiceError } from '../errors';
import { audit } from './audit';
import { saneWindow } from './claim-formula';
import { toleranceOf } from './tree-chemistry';
import { touchTree } from './tree-touch';

type TreeRow = typeof trees.$inferSelect;
type Change = Partial<Pick<TreeRow, 'name' | 'settings' | 'formula' | 'adduct' | 'formulaFixed' | 'confidenceLevel'>>;

const invalid = (message: string, cure: string | null) => new ServiceError('invalid', message, cure);

function byCore<T>(work: () => T): T {
  try {
    return work();
  } catch (e) {
    if (e instanceof CoreError) throw invalid(e.message, e.cure);
    throw e;
  }
}

function checkPolarity(adduct: Adduct, tree: TreeRow): void {
  if (adduct.charge > 0 === (tree.polarity === 'positive')) return;
  throw invalid(
    `The ion type ${adduct.name} does not belong to a ${tree.polarity} run.`,
    `Name a ${tree.polarity === 'positive' ? 'cation, e.g. [M+H]+' : 'anion, e.g. [M-H]-'}.`
  );
}

function checkedSettings(settings: TreeSettings, tree: TreeRow): TreeSettings {
  if (settings.elements !== null) byCore(() => parseElementRanges(settings.elements ?? ''));
  const adducts = settings.adducts.map((name) => byCore(() => parseAdduct(name)));
  adducts.forEach((adduct) => checkPolarity(adduct, tree));
  if (settings.tolerance && settings.tolerance.ppm === 0 && settings.tolerance.mda === 0)
    throw invalid('A window of 0 ppm and 0 mDa finds nothing.', 'Give one of the two.');
  return { ...settings, adducts: adducts.map((adduct) => adduct.name) };
}

/** Fixes the precursor's formula after checking it against the measured m/z. */
function fixedFormula(tree: TreeRow, text: string, adductName: string | null, analyser: string): Change {
  const name = adductName ?? tree.adduct;
  if (!name) throw invalid('The ion type of the precursor is not known yet.', 'Name it with the formula, e.g. [M+H]+.');
  const adduct = byCore(() => parseAdduct(name));
  checkPolarity(adduct, tree);
  const neutral = byCore(() => parseFormula(text));
  const ion = ionFormulaOf(neutral, adduct);
  if (!ion) throw invalid(`${formatFormula(neutral)} lacks the atoms that ${adduct.name} loses.`, 'Check both.');
  const calculated = ionMz(ion, adduct.charge);
  if (Math.abs(calculated - tree.precursorMz) > saneWindow(toleranceOf(tree, analyser), tree.precursorMz))
    throw invalid(
      `${formatFormula(neutral)} as ${adduct.name} is calculated at m/z ${calculated.toFixed(4)}; the precursor ion was ` +
        `found at ${tree.precursorMz.toFixed(4)}, ${Math.abs(errorPpm(tree.precursorMz, calculated)).toFixed(0)} ppm apart.`,
      'Check the formula and the ion type.'
    );
  return { formula: formatFormula(neutral), adduct: adduct.name, formulaFixed: true };
}

/** The first-ranked candidate stands again. */
function freedFormula(tree: TreeRow): Change {
  const best = tree.candidates[0];
  return { formulaFixed: false, formula: best?.formula ?? null, adduct: best?.adduct ?? tree.adduct };
}

function changeOf(tree: TreeRow, patch: TreePatch, analyser: string): Change {
  const change: Change = {};
  if (patch.name !== undefined) change.name = patch.name;
  if (patch.settings) change.settings = checkedSettings(patch.settings, tree);
  if (patch.confidenceLevel !== undefined) change.confidenceLevel = patch.confidenceLevel;
  if (patch.formula === null) return { ...change, ...freedFormula(tree) };
  const formula = patch.formula ?? (patch.adduct && tree.formulaFixed ? tree.formula : null);
  if (formula) return { ...change, ...fixedFormula(tree, formula, patch.adduct ?? null, analyser) };
  if (patch.adduct)
    throw invalid('An ion type is fixed together with a formula.', 'Send the formula too, or set it in the settings.');
  return change;
}

/**
 * Changes name, settings, precursor formula or confidence level of a tree.
 * @throws ServiceError invalid with the core's words, conflict when the tree changed since `patch.version`
 */
export async function editTree(actor: Actor | null, treeId: string, patch: TreePatch): Promise<{ version: number }> {
  const { group } = await requireTree(actor, treeId, 'tree.edit');
  return database().transaction(async (tx) => {
    const [tree] = await tx.select().from(trees).where(eq(trees.id, treeId)).for('update');
    if (tree.version !== patch.version)
      throw new ServiceError(
        'conflict',
        'The tree changed since you loaded it. Nothing was saved.',
        'Look at the change, then save again.',
        { version: tree.version }
      );
    const [first] = await tx
      .select({ analyser: treeSpectra.analyser })
      .from(treeSpectra)
      .where(eq(treeSpectra.treeId, treeId))
      .orderBy(treeSpectra.index)
      .limit(1);
    const change = changeOf(tree, patch, first?.analyser ?? 'unknown');
    await tx.update(trees).set(change).where(eq(trees.id, treeId));
    await touchTree(tx, treeId);
    await audit(tx, actor, {
      groupId: group.id,
      action: 'tree.edited',
      subjectKind: 'tree',
      subjectId: treeId,
      details: change
    });
    return { version: tree.version + 1 };
  });
}
