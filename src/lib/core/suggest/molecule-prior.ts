import { type ScoreTerms } from '../model';
import { type IonSpace } from './ion-space';
import { heteroRatio } from './peak-candidates';
import { WEIGHTS } from './weights';

/**
 * How ordinary a neutral molecule's composition is, before any product ion is looked at: log odds of elements,
 * the published ratio limits as soft steps (Kind & Fiehn, BMC Bioinformatics 8:105, 2007, rules 4 and 5), and the
 * normal penalty on hetero atoms per carbon.
 */

/** Log odds that a molecule holds the element at all, and of each further atom. */
const ODDS: Readonly<Record<string, readonly [first: number, further: number]>> = {
  // Not rare, but each atom less usual than one of carbon or oxygen; without it formulas rich in N win by number.
  N: [-0.3, -0.3],
  S: [-1.2, -0.8],
  P: [-2.2, -1.2],
  F: [-2.2, -0.5],
  Cl: [-1.8, -0.7],
  Br: [-2.8, -1.5],
  I: [-3, -1.5],
  Si: [-4, -0.5],
  B: [-4, -1.5],
  Se: [-5, -2],
  Na: [-4, -1.5],
  K: [-4, -1.5],
  Li: [-5, -2]
};

/** Common and extended maxima of an element's ratio to carbon. */
const RATIOS: Readonly<Record<string, readonly [common: number, extended: number]>> = {
  H: [3.1, 6],
  N: [1.3, 4],
  O: [1.2, 3],
  P: [0.3, 2],
  S: [0.8, 3],
  F: [1.5, 6],
  Cl: [0.8, 2],
  Br: [0.8, 2],
  Si: [0.5, 1]
};
const COMMON_MIN_HC = 0.2;
const EXTENDED_MIN_HC = 0.1;

const OUTSIDE_COMMON = -2;
const OUTSIDE_EXTENDED = -6;

/** Terms of a neutral composition, counts in the order of the space. */
export function moleculeTerms(ions: IonSpace, counts: ArrayLike<number>): ScoreTerms {
  const carbon = counts[0];
  const terms: ScoreTerms = {};
  let odds = 0;
  let ratio = 0;
  for (let i = 1; i < counts.length; i++) {
    const symbol = ions.symbols[i];
    const own = ODDS[symbol];
    if (own && counts[i] > 0) odds += own[0] + (counts[i] - 1) * own[1];
    ratio = Math.min(ratio, ratioStep(symbol, counts[i], carbon));
  }
  if (odds < 0) terms['element odds'] = odds;
  if (ratio < 0) terms['element ratios'] = ratio;
  const z = (heteroRatio(counts) - WEIGHTS.heteroMean) / WEIGHTS.heteroDeviation;
  if (z > 0) terms['hetero atoms per carbon'] = -(z * z) / 2;
  return terms;
}

function ratioStep(symbol: string, count: number, carbon: number): number {
  const limits = RATIOS[symbol];
  if (!limits || (count === 0 && symbol !== 'H')) return 0;
  const ratio = carbon > 0 ? count / carbon : Infinity;
  if (ratio > limits[1] || (symbol === 'H' && ratio < EXTENDED_MIN_HC)) return OUTSIDE_EXTENDED;
  return ratio > limits[0] || (symbol === 'H' && ratio < COMMON_MIN_HC) ? OUTSIDE_COMMON : 0;
}
