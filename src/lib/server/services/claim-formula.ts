import { dbe, formatFormula, ionMz, isOddElectron, isRadical, isSubset, parseFormula, subtract } from '$lib/core/chem';
import { CoreError } from '$lib/core/errors';
import { errorPpm, isUnitResolution, windowAt } from '$lib/core/formula';
import type { Composition, IonAlternative, ScoreTerms, Tolerance } from '$lib/core/model';
import { ServiceError } from '../errors';

/** An ion that others hang on. */
export interface HoldingIon {
  mz: number;
  /** Hill order. */
  formula: string;
}

/** What is known about the ion whose formula a person names. */
export interface ClaimContext {
  mz: number;
  /** signed charge number, not 0. */
  charge: number;
  tolerance: Tolerance;
  /** precursor ion of the tree under its chosen formula and ion type; null while nobody knows it. */
  treeIon: string | null;
  /** the ion isolated for this spectrum; null while it has no formula. */
  isolated: HoldingIon | null;
  /** the ion it hung on before. */
  from: HoldingIon | null;
  alternatives: readonly IonAlternative[];
  reason: string | null;
}

/** The chemistry of a claim, as stored with the ion. */
export interface ClaimChemistry {
  formula: string;
  errorPpm: number;
  dbe: number;
  oddElectron: boolean;
  fromMz: number | null;
  fromFormula: string | null;
  loss: string | null;
  lossRadical: boolean;
  link: 'measured' | 'inferred' | null;
  score: number | null;
  terms: ScoreTerms;
}

const invalid = (message: string, cure: string) => new ServiceError('invalid', message, cure);

/** Reads a formula that a person typed. @throws ServiceError invalid with the core's words */
export function readFormula(text: string): Composition {
  try {
    return parseFormula(text);
  } catch (e) {
    if (e instanceof CoreError) throw invalid(e.message, e.cure ?? 'Correct the formula.');
    throw e;
  }
}

/** How far, in m/z, a person may go from the calculated m/z: five search windows, one and a half at unit resolution. */
export const saneWindow = (tolerance: Tolerance, mz: number): number =>
  windowAt(tolerance, mz) * (isUnitResolution(tolerance) ? 1.5 : 5);

function checkMass(found: number, calculated: number, tolerance: Tolerance, formula: string): void {
  const window = saneWindow(tolerance, found);
  if (Math.abs(found - calculated) <= window) return;
  throw invalid(
    `${formula} is calculated at m/z ${calculated.toFixed(4)}, the ion was found at ${found.toFixed(4)}: ` +
      `${Math.abs(errorPpm(found, calculated)).toFixed(0)} ppm apart.`,
    `Within ${window.toFixed(4)} of the found m/z a formula can be confirmed here; check the formula and its charge.`
  );
}

/** Loss from `from` to `part`, both Hill-order ion formulas; null when `part` is no proper part of it. */
export function lossBetween(from: string, part: string): { loss: string; lossRadical: boolean } | null {
  const whole = parseFormula(from);
  const rest = parseFormula(part);
  if (from === part || !isSubset(rest, whole)) return null;
  const loss = subtract(whole, rest);
  return { loss: formatFormula(loss), lossRadical: isRadical(loss) };
}

type Hanging = Pick<ClaimChemistry, 'fromMz' | 'fromFormula' | 'loss' | 'lossRadical' | 'link'>;
const UNATTACHED: Hanging = { fromMz: null, fromFormula: null, loss: null, lossRadical: false, link: null };

/** Keeps the ion on what it hung on where the formula allows, else hangs it on the isolated ion. */
function hang(context: ClaimContext, formula: string): Hanging {
  const { isolated, from } = context;
  if (isolated?.formula === formula) return UNATTACHED;
  for (const holder of [from, isolated]) {
    const step = holder && lossBetween(holder.formula, formula);
    if (!step) continue;
    const link = holder.formula === isolated?.formula ? 'measured' : 'inferred';
    return { fromMz: holder.mz, fromFormula: holder.formula, ...step, link };
  }
  return UNATTACHED;
}

function checkParts(context: ClaimContext, ion: Composition, formula: string): void {
  const { treeIon, isolated, reason } = context;
  if (treeIon && !isSubset(ion, parseFormula(treeIon)))
    throw invalid(
      `${formula} holds atoms that the precursor ion ${treeIon} does not have.`,
      'Choose a formula within the precursor ion, or fix another precursor formula first.'
    );
  if (isolated && !isSubset(ion, parseFormula(isolated.formula)) && !reason)
    throw invalid(
      `${formula} holds atoms that ${isolated.formula}, the ion isolated for this spectrum, does not have.`,
      'If the ion took up atoms after isolation (water, for instance), say so as the reason; else choose another formula.'
    );
}

/**
 * Works out what a claim of `text` for the ion means: error (ppm), DBE, parity, and the loss from the ion it hangs on.
 * @param text ion formula without charge, as typed
 * @throws ServiceError invalid when it cannot be read, lies too far from the found m/z, or has atoms that the precursor
 *   ion has not; atoms beyond the ion isolated for the spectrum need a written reason
 */
export function claimForFormula(context: ClaimContext, text: string): ClaimChemistry {
  const ion = readFormula(text);
  const formula = formatFormula(ion);
  const calculated = ionMz(ion, context.charge);
  checkMass(context.mz, calculated, context.tolerance, formula);
  checkParts(context, ion, formula);
  const known = context.alternatives.find((a) => a.formula === formula);
  return {
    formula,
    errorPpm: errorPpm(context.mz, calculated),
    dbe: dbe(ion),
    oddElectron: isOddElectron(ion, context.charge),
    ...hang(context, formula),
    score: known?.score ?? null,
    terms: known?.terms ?? {}
  };
}
