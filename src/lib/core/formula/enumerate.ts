import { formatFormula, ionMz, nucleiMass } from '../chem/composition';
import { valenceOf } from '../chem/elements';
import { CoreError } from '../errors';
import { type Composition, type ElementRanges } from '../model';
import { forEachFormula, formulaSpace, subformulaSpace, toComposition, type FormulaSpace } from './solve';

/** A composition found within a mass window. */
export interface FormulaHit {
  composition: Composition;
  /** Hill order. */
  formula: string;
  /** monoisotopic mass in u (neutral) or m/z (ions), as the function says. */
  calculated: number;
  /** (asked − calculated)/calculated in ppm. */
  errorPpm: number;
  dbe: number;
}

export interface EnumerationRules {
  /** smallest rings-plus-double-bonds, e.g. 0 for molecules, −0.5 for ions; default: no limit. */
  minDbe?: number;
  /** 'whole' for closed-shell molecules, 'half' for even-electron singly charged ions; default: both. */
  parity?: 'whole' | 'half';
}

/** More hits than this are refused: nobody can use them, and memory is bounded. */
export const MAX_HITS = 2_000_000;

const accept = (value: number, rules: EnumerationRules) =>
  value >= (rules.minDbe ?? -Infinity) &&
  (rules.parity === undefined || Number.isInteger(value) === (rules.parity === 'whole'));

/** Rings plus double bonds of counts in the order of a space's symbols, without making a composition of them. */
function dbeOf(space: FormulaSpace): (counts: ArrayLike<number>) => number {
  const share = Float64Array.from(space.symbols, (symbol) => (valenceOf(symbol) - 2) / 2);
  return (counts) => {
    let sum = 1;
    for (let i = 0; i < share.length; i++) sum += counts[i] * share[i];
    return sum;
  };
}

const byError = (a: FormulaHit, b: FormulaHit) =>
  Math.abs(a.errorPpm) - Math.abs(b.errorPpm) || (a.formula < b.formula ? -1 : 1);

/**
 * All compositions within `window` u of a neutral monoisotopic mass, nearest first.
 * @throws CoreError too-many-candidates beyond two million hits
 */
export function enumerateFormulas(
  mass: number,
  window: number,
  ranges: ElementRanges,
  rules: EnumerationRules = {}
): FormulaHit[] {
  const space = formulaSpace(ranges);
  const bondsOf = dbeOf(space);
  const hits: FormulaHit[] = [];
  forEachFormula(space, mass - window, mass + window, (counts, calculated) => {
    const bonds = bondsOf(counts);
    if (!accept(bonds, rules)) return;
    const composition = toComposition(space, counts);
    if (hits.length >= MAX_HITS) throw tooMany(mass);
    const formula = formatFormula(composition);
    hits.push({ composition, formula, calculated, errorPpm: ((mass - calculated) / calculated) * 1e6, dbe: bonds });
  });
  return hits.sort(byError);
}

const tooMany = (mass: number) =>
  new CoreError(
    'too-many-candidates',
    `More than ${MAX_HITS.toLocaleString('en')} formulas lie in the window at mass ${mass.toFixed(4)}.`,
    undefined,
    'Narrow the tolerance or the element ranges.'
  );

/**
 * All sub-formulas of an ion composition within `window` of an m/z, nearest first. `charge` is the signed charge
 * number of the product ion, `whole` the composition of all nuclei of its precursor ion; `calculated` is an m/z.
 */
export function subformulas(
  whole: Composition,
  mz: number,
  window: number,
  charge: number,
  rules: EnumerationRules = { minDbe: -0.5 }
): FormulaHit[] {
  const space = subformulaSpace(whole);
  const bondsOf = dbeOf(space);
  const hits: FormulaHit[] = [];
  const z = Math.abs(charge);
  const target = nucleiMass(mz, charge);
  forEachFormula(space, target - window * z, target + window * z, (counts) => {
    const bonds = bondsOf(counts);
    if (!accept(bonds, rules)) return;
    const composition = toComposition(space, counts);
    const calculated = ionMz(composition, charge);
    const formula = formatFormula(composition);
    hits.push({ composition, formula, calculated, errorPpm: ((mz - calculated) / calculated) * 1e6, dbe: bonds });
  });
  return hits.sort(byError);
}
