import { type Adduct, neutralMassOf, parseFormula, ionFormulaOf, add, formatFormula } from '../chem';
import { elementMass } from '../chem/elements';
import { CoreError } from '../errors';
import { forEachFormula, formulaSpace, type FormulaSpace } from '../formula/solve';
import { type Composition, type ElementRanges } from '../model';
import { IonSpace, type IonFormula } from './ion-space';
import { ionTypeLogOdds } from './ion-type-prior';
import { moleculeTerms } from './molecule-prior';
import { massErrorTerm, sumTerms } from './peak-candidates';
import { type ScoreTerms } from '../model';

/** A possible formula of the precursor ion. */
export interface PrecursorCandidate {
  adduct: Adduct;
  ion: IonFormula;
  /** counts of the neutral M in the order of the ion space. */
  neutral: Int32Array;
  /** found against calculated m/z, ppm. */
  errorPpm: number;
  terms: ScoreTerms;
  prior: number;
}

/** More precursor formulas than this are not ranked; the tolerance or the elements must be narrowed. */
export const MAX_PRECURSORS = 60_000;

/**
 * Element maxima that a molecule of this mass can reach at all: by mass, and for hydrogen by valence
 * (2 + 2 C + N + P + …, so never more than about 2.4 per 12 u plus 6).
 */
function tightRanges(ranges: ElementRanges, mass: number): ElementRanges {
  const entries = Object.entries(ranges).map(([symbol, [low, high]]) => {
    const byMass = Math.floor((mass + 0.5) / elementMass(symbol));
    const byValence = symbol === 'H' ? Math.floor(mass / 5) + 6 : Infinity;
    return [symbol, [Math.min(low, byMass), Math.max(0, Math.min(high, byMass, byValence))] as const] as const;
  });
  return Object.fromEntries(entries.filter(([, [, high]]) => high > 0));
}

/** The space that holds every ion of the search: the largest neutral, the adducts' atoms, and one water for traps. */
export function ionSpaceFor(
  ranges: ElementRanges,
  adducts: readonly Adduct[],
  water: boolean,
  largestMass: number
): IonSpace {
  const widened: Record<string, [number, number]> = {};
  for (const [symbol, [, high]] of Object.entries(tightRanges(ranges, largestMass))) widened[symbol] = [0, high];
  const widen = (composition: Composition) => {
    for (const symbol of Object.keys(composition)) {
      const own = widened[symbol]?.[1] ?? 0;
      widened[symbol] = [0, own + composition[symbol]];
    }
  };
  const most: Record<string, number> = {};
  for (const { gain } of adducts) {
    for (const symbol of Object.keys(gain)) most[symbol] = Math.max(most[symbol] ?? 0, gain[symbol]);
  }
  widen(most);
  if (water) widen({ H: 2, O: 1 });
  return new IonSpace(formulaSpace(widened));
}

/** The one precursor candidate of a known neutral formula and ion type. */
export function knownPrecursor(formula: string, adducts: readonly Adduct[], water: boolean) {
  const neutral = parseFormula(formula);
  const made = adducts.flatMap((adduct) => {
    const ion = ionFormulaOf(neutral, adduct);
    return ion ? [{ adduct, ion }] : [];
  });
  if (made.length === 0) {
    throw new CoreError(
      'bad-adduct',
      `${formatFormula(neutral)} cannot form ${adducts.map((a) => a.name).join(' or ')}.`
    );
  }
  let all: Composition = {};
  for (const { ion } of made) {
    for (const symbol of Object.keys(ion))
      all = { ...all, [symbol]: Math.max(all[symbol] ?? 0, ion[symbol], neutral[symbol] ?? 0) };
  }
  if (water) all = add(all, { H: 2, O: 1 });
  const ranges = Object.fromEntries(Object.keys(all).map((s) => [s, [0, all[s]] as const]));
  return { neutral, made, ions: new IonSpace(formulaSpace(ranges)) };
}

/** Counts of a composition in the order of a space. */
export function countsIn(ions: IonSpace, composition: Composition): Int32Array {
  return Int32Array.from(ions.symbols, (s) => composition[s] ?? 0);
}

/** A precursor candidate from neutral counts; null when M lacks the atoms that the ion type loses. */
export function precursorOf(
  ions: IonSpace,
  neutral: Int32Array,
  adduct: Adduct,
  mz: number,
  sigma: number
): PrecursorCandidate | null {
  const counts = ions.symbols.map(
    (s, i) => neutral[i] * adduct.molecules + (adduct.gain[s] ?? 0) - (adduct.loss[s] ?? 0)
  );
  if (counts.some((n, i) => n < 0 || n > ions.space.max[i])) return null;
  const ion = ions.formula(ions.key(counts));
  const calculated = ions.mz(ion, adduct.charge);
  const terms: ScoreTerms = {
    'precursor mass error': massErrorTerm(mz - calculated, sigma),
    ...moleculeTerms(ions, neutral)
  };
  return {
    adduct,
    ion,
    neutral: Int32Array.from(neutral),
    errorPpm: ((mz - calculated) / calculated) * 1e6,
    terms,
    prior: sumTerms(terms)
  };
}

/**
 * Every precursor formula within the window (half width, m/z) for the given ion types: closed-shell neutral
 * molecules, or closed-shell cations for [M]+.
 * @throws CoreError too-many-candidates
 */
export function enumeratePrecursors(
  ions: IonSpace,
  ranges: ElementRanges,
  adducts: readonly Adduct[],
  mz: number,
  window: number,
  sigma: number
): PrecursorCandidate[] {
  const list: PrecursorCandidate[] = [];
  for (const adduct of adducts) {
    const mass = neutralMassOf(mz, adduct);
    const reach = (window * Math.abs(adduct.charge)) / adduct.molecules;
    const preCharged = adduct.name === '[M]+';
    // A single ion type was chosen by somebody: nothing is left to weigh.
    const usual = adducts.length > 1 ? ionTypeLogOdds(adduct.name) : 0;
    forEachFormula(neutralSpace(ions, ranges, mass), mass - reach, mass + reach, (counts) => {
      const bonds = ions.dbe(counts);
      if (bonds < 0 || Number.isInteger(bonds) === preCharged) return;
      const made = precursorOf(ions, counts, adduct, mz, sigma);
      if (!made) return;
      if (usual !== 0) {
        made.terms['ion type'] = usual;
        made.prior += usual;
      }
      if (list.length >= MAX_PRECURSORS) throw tooMany(mz);
      list.push(made);
    });
  }
  return list;
}

/** The asked ranges in the element order of the ion space. */
function neutralSpace(ions: IonSpace, ranges: ElementRanges, mass: number): FormulaSpace {
  const tight = tightRanges(ranges, mass);
  return {
    symbols: ions.symbols,
    masses: ions.space.masses,
    min: Int32Array.from(ions.symbols, (s) => tight[s]?.[0] ?? 0),
    max: Int32Array.from(ions.symbols, (s) => tight[s]?.[1] ?? 0)
  };
}

const tooMany = (mz: number) =>
  new CoreError(
    'too-many-candidates',
    `More than ${MAX_PRECURSORS.toLocaleString('en')} precursor formulas lie in the window at m/z ${mz.toFixed(4)}.`,
    undefined,
    'Give the formula, or narrow the tolerance, the element ranges or the ion types.'
  );
