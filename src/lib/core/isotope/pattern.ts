import { ELECTRON_MASS, elementOf } from '../chem/elements';
import { type Composition } from '../model';

/**
 * Isotope pattern aggregated by nucleon number. `abundance[i]` is the fraction of all ions with i nucleons more than
 * the lightest isotopologue, `mass[i]` their mean mass in u.
 */
export interface IsotopePattern {
  abundance: Float64Array;
  mass: Float64Array;
  /** position of the monoisotopic isotopologue (every element as its most abundant isotope). */
  monoisotopic: number;
}

/** Isotopologues this many nucleons above the lightest are left out; enough for organic molecules to 3000 u. */
const OFFSETS = 24;

interface Power {
  abundance: Float64Array;
  /** abundance-weighted mass sum: mean mass times abundance. */
  moment: Float64Array;
}

const unity = (): Power => {
  const abundance = new Float64Array(OFFSETS);
  abundance[0] = 1;
  return { abundance, moment: new Float64Array(OFFSETS) };
};

function convolve(a: Power, b: Power): Power {
  const abundance = new Float64Array(OFFSETS);
  const moment = new Float64Array(OFFSETS);
  for (let i = 0; i < OFFSETS; i++) {
    if (a.abundance[i] === 0) continue;
    for (let j = 0; i + j < OFFSETS; j++) {
      if (b.abundance[j] === 0) continue;
      abundance[i + j] += a.abundance[i] * b.abundance[j];
      moment[i + j] += a.moment[i] * b.abundance[j] + a.abundance[i] * b.moment[j];
    }
  }
  return { abundance, moment };
}

function single(symbol: string): Power {
  const power = { abundance: new Float64Array(OFFSETS), moment: new Float64Array(OFFSETS) };
  const isotopes = elementOf(symbol)?.isotopes ?? [];
  for (const { nucleons, mass, abundance } of isotopes) {
    const offset = nucleons - isotopes[0].nucleons;
    power.abundance[offset] = abundance;
    power.moment[offset] = abundance * mass;
  }
  return power;
}

// Powers of elements are the same for every formula: thousands of candidates share them.
const powers = new Map<string, Power[]>();

function elementPower(symbol: string, count: number): Power {
  let list = powers.get(symbol);
  if (!list) powers.set(symbol, (list = [unity(), single(symbol)]));
  while (list.length <= count) list.push(convolve(list[list.length - 1], list[1]));
  return list[count];
}

/** Isotope pattern of all nuclei of a composition (neutral masses; electrons are not counted). */
export function isotopePattern(composition: Composition): IsotopePattern {
  let total = unity();
  let monoisotopic = 0;
  for (const symbol of Object.keys(composition)) {
    const element = elementOf(symbol);
    if (!element || composition[symbol] <= 0) continue;
    total = convolve(total, elementPower(symbol, composition[symbol]));
    monoisotopic += composition[symbol] * (element.principal - element.isotopes[0].nucleons);
  }
  const mass = Float64Array.from(total.moment, (m, i) => (total.abundance[i] > 0 ? m / total.abundance[i] : NaN));
  return { abundance: total.abundance, mass, monoisotopic };
}

/** One isotope peak of an ion: m/z and intensity relative to the monoisotopic peak. */
export interface IsotopePeak {
  /** nucleons more than the monoisotopic ion; negative below it. */
  offset: number;
  mz: number;
  relative: number;
}

/** Isotope peaks of an ion of signed charge, those of at least `minRelative` of the largest, ascending m/z. */
export function ionIsotopePeaks(composition: Composition, charge: number, minRelative = 1e-4): IsotopePeak[] {
  const { abundance, mass, monoisotopic } = isotopePattern(composition);
  const largest = abundance.reduce((a, b) => Math.max(a, b), 0);
  const base = abundance[monoisotopic];
  const peaks: IsotopePeak[] = [];
  abundance.forEach((share, i) => {
    if (share < minRelative * largest || share === 0) return;
    const mz = (mass[i] - charge * ELECTRON_MASS) / Math.abs(charge);
    peaks.push({ offset: i - monoisotopic, mz, relative: share / base });
  });
  return peaks;
}
