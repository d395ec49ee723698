import { ionMz, parseFormula } from '$lib/core/chem';
import type { ClaimDecision } from '$lib/schema/tree';
import type { WorkbenchView } from '$lib/schema/workbench';
import type { Actor } from '../auth/authorize';
import { decideClaims } from '../services/claims';
import { workbenchView } from '../services/workbench';

/** One ion of a tree as the story of the demo picks it. */
export interface IonAtHand {
  id: number;
  version: number;
  spectrum: number;
  level: number;
  mz: number;
  /** percent of the base peak of its spectrum */
  relative: number;
  formula: string | null;
  state: string;
}

function ionsOf(view: WorkbenchView): IonAtHand[] {
  const { ions, spectra } = view;
  const base = new Map<number, number>();
  ions.spectrum.forEach((s, i) => base.set(s, Math.max(base.get(s) ?? 0, ions.intensity[i])));
  return ions.id.map((id, i) => ({
    id,
    version: ions.version[i],
    spectrum: ions.spectrum[i],
    level: spectra[ions.spectrum[i]].level,
    mz: ions.mz[i],
    relative: (100 * ions.intensity[i]) / (base.get(ions.spectrum[i]) ?? 1),
    formula: ions.formula[i] < 0 ? null : ions.strings[ions.formula[i]],
    state: ions.state[i]
  }));
}

/** A tree as a person looks at it: its version and its ions. */
export async function lookAt(actor: Actor, treeId: string) {
  const view = await workbenchView(actor, treeId);
  return { version: view.tree.version, tree: view.tree, ions: ionsOf(view) };
}

/** The strongest ion of a stage that lies within 10 ppm of an m/z. @throws Error when there is none */
export function ionNear(ions: readonly IonAtHand[], level: number, mz: number): IonAtHand {
  const found = ions.filter((ion) => ion.level === level && Math.abs(ion.mz - mz) <= mz * 10e-6);
  found.sort((a, b) => b.relative - a.relative);
  if (!found[0]) throw new Error(`The demo's tree has no ion at m/z ${mz.toFixed(4)} in MS${level}.`);
  return found[0];
}

/** m/z of a singly charged ion of this composition. */
export const mzOfIon = (formula: string, charge: 1 | -1): number => ionMz(parseFormula(formula), charge);

/** Confirms every proposed ion from a height on, except some. @param percent of the base peak of its spectrum */
export async function confirmFrom(actor: Actor, treeId: string, percent: number, except: readonly number[] = []) {
  const { ions } = await lookAt(actor, treeId);
  const decisions = ions
    .filter((ion) => ion.state === 'p' && ion.relative >= percent && !except.includes(ion.id))
    .map(({ id, version }): ClaimDecision => ({ ionId: id, version, action: 'confirm' }));
  if (decisions.length > 0) await decideClaims(actor, treeId, decisions);
}

/** Says of every ion without a formula, from a height on, why it stays open. */
export async function leaveOpen(actor: Actor, treeId: string, percent: number, reason: string) {
  const { ions } = await lookAt(actor, treeId);
  const decisions = ions
    .filter((ion) => ion.state === 'o' && ion.formula === null && ion.relative >= percent)
    .map(({ id, version }): ClaimDecision => ({ ionId: id, version, action: 'open', reason }));
  if (decisions.length > 0) await decideClaims(actor, treeId, decisions);
}
