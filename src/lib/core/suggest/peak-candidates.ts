import { naturalLog } from './logarithm';
import { nucleiMass } from '../chem';
import { forEachFormula, type FormulaSpace } from '../formula/solve';
import { type ScoreTerms } from '../model';
import { type IonFormula, type IonSpace } from './ion-space';
import { type StagePeak } from './stages';
import { WEIGHTS } from './weights';

/** A formula of one peak, with what it is worth by itself. */
export interface PeakCandidate {
  ion: IonFormula;
  /** charge number, positive. */
  charge: number;
  /** calculated m/z. */
  mz: number;
  /** (found − calculated)/calculated, ppm. */
  errorPpm: number;
  /** formed by taking up H2O: the ion less H2O is the sub-formula. */
  water: boolean;
  terms: ScoreTerms;
  score: number;
}

/** What is searched for a peak: its place, strength and what a person said of it. */
export type PeakTarget = Pick<StagePeak, 'mz' | 'window' | 'sigma' | 'relative' | 'confirmed' | 'rejected'>;

/** Log of a Gaussian relative to its top; deviation and sigma in the same unit. */
export function massErrorTerm(deviation: number, sigma: number): number {
  return -((deviation / sigma) ** 2) / 2;
}

/** Gain of explaining a peak rather than calling it noise, whose intensities follow a Pareto law. */
export function intensityTerm(relative: number): number {
  return WEIGHTS.explained + WEIGHTS.noiseExponent * naturalLog(Math.max(1, relative / WEIGHTS.noiseCutOff));
}

/**
 * A whole with many sub-formulas explains any m/z: an explanation that is one of n says less, by log n if the ions of
 * a spectrum were independent, by a part of it as they are not.
 */
export const chanceTerm = (n: number): number => -WEIGHTS.chance * naturalLog(Math.max(1, n));

/** Terms of a formula that depend on nothing but itself. */
export function compositionTerms(ion: IonFormula): ScoreTerms {
  const terms: ScoreTerms = {};
  const z = (heteroRatio(ion.counts) - WEIGHTS.heteroMean) / WEIGHTS.heteroDeviation;
  if (z > 0) terms['hetero atoms per carbon'] = -(z * z) / 2;
  if (ion.dbe < 0) terms['few bonds'] = WEIGHTS.saturatedIon;
  return terms;
}

/** Atoms other than C and H per carbon, at most 2 (small carbon-free ions are real). */
export function heteroRatio(counts: ArrayLike<number>): number {
  let hetero = 0;
  for (let i = 2; i < counts.length; i++) hetero += counts[i];
  return Math.min(2, counts[0] > 0 ? hetero / counts[0] : hetero);
}

export const sumTerms = (terms: ScoreTerms): number => Object.values(terms).reduce((a, b) => a + b, 0);

/**
 * Formulas of a peak among the sub-formulas of an ion, with possible valences, for each charge up to that ion's.
 * With `water` also those of sub-formula + H2O.
 */
export function peakCandidates(
  ions: IonSpace,
  peak: PeakTarget,
  whole: IonFormula,
  maxCharge: number,
  sign: 1 | -1,
  water: boolean
): PeakCandidate[] {
  const list: PeakCandidate[] = [];
  for (let charge = 1; charge <= maxCharge; charge++) {
    const target = nucleiMass(peak.mz, sign * charge);
    const reach = peak.window * charge;
    const found = (space: FormulaSpace, gained: number, isWater: boolean) =>
      forEachFormula(space, target - gained - reach, target - gained + reach, (counts, mass) => {
        const key = ions.key(counts) + (isWater ? ions.waterKey : 0);
        if (isWater && ions.contains(whole, ions.formula(key))) return;
        const ion = ions.formula(key);
        if (ion.dbe < -0.5 || (key === whole.key && charge === maxCharge)) return;
        list.push(judge(peak, ion, charge, peak.mz + (mass + gained - target) / charge, isWater));
      });
    const space = { ...ions.space, min: new Int32Array(whole.counts.length), max: Int32Array.from(whole.counts) };
    found(space, 0, false);
    if (water) found(space, ions.waterMass, true);
  }
  return applyClaims(ions, peak, withChance(list));
}

function withChance(list: PeakCandidate[]): PeakCandidate[] {
  if (list.length < 2) return list;
  const chance = chanceTerm(list.length);
  return list.map((c) => ({ ...c, terms: { ...c.terms, 'chance match': chance }, score: c.score + chance }));
}

function judge(peak: PeakTarget, ion: IonFormula, charge: number, mz: number, water: boolean): PeakCandidate {
  const terms: ScoreTerms = {
    'mass error': massErrorTerm(peak.mz - mz, peak.sigma),
    intensity: intensityTerm(peak.relative),
    ...compositionTerms(ion)
  };
  if (water) terms['water adduct'] = WEIGHTS.waterAdduct;
  return { ion, charge, mz, errorPpm: ((peak.mz - mz) / mz) * 1e6, water, terms, score: sumTerms(terms) };
}

/** A person's decisions are hard: a confirmed formula stands alone, rejected ones are gone. */
function applyClaims(ions: IonSpace, peak: PeakTarget, list: PeakCandidate[]): PeakCandidate[] {
  if (peak.confirmed !== null) return list.filter((c) => ions.text(c.ion.key) === peak.confirmed);
  if (peak.rejected.length === 0) return list;
  if (peak.rejected.includes(null)) return [];
  return list.filter((c) => !peak.rejected.includes(ions.text(c.ion.key)));
}
