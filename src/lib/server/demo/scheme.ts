import type { AnalyserKind, Polarity, SourceKind } from '$lib/core/model';

/** One product ion of an invented molecule: its composition, never its mass. */
export interface ProductIon {
  /** composition of the ion, Hill order, without charge */
  formula: string;
  /** height in percent of the strongest ion of its stage */
  percent: number;
  /** collision energy at which it is strongest; absent: it is the same at all energies */
  best?: number;
}

/** A peak that no formula explains: only where it lies is known. */
export interface StrayPeak {
  mz: number;
  percent: number;
}

/** One spectrum that was taken again and again: which ions were isolated one after the other, and what came out. */
export interface Stage {
  /** ion formulas isolated after the precursor ion; empty for MS2 */
  path: readonly string[];
  activation: 'CID' | 'HCD';
  energies: readonly number[];
  /** counts of the strongest ion, as a share of the precursor ion's current in MS1 */
  yield: number;
  /** what is left of the isolated ion, percent */
  left: number;
  products: readonly ProductIon[];
  /** product ions of something else that went through the same isolation window */
  coIsolated?: readonly ProductIon[];
  stray?: readonly StrayPeak[];
}

export interface Compound {
  /** neutral molecule */
  formula: string;
  adduct: string;
  /** s */
  apex: number;
  /** s, standard deviation of the elution peak */
  width: number;
  /** counts of the monoisotopic MS1 peak at the apex */
  height: number;
  stages: readonly Stage[];
}

/** One invented run. */
export interface DemoRun {
  fileName: string;
  id: string;
  seed: number;
  sample: string;
  startTime: string;
  ionSource: SourceKind;
  analyser: AnalyserKind;
  instrument: string;
  polarity: Polarity;
  energyUnit: 'eV' | '%';
  /** half width of the isolation window, m/z */
  isolation: number;
  /** s */
  length: number;
  /** ppm: a shift of all m/z, and the scatter of each */
  shift: number;
  scatter: number;
  /** m/z range of the analyser */
  range: readonly [number, number];
  compounds: readonly Compound[];
}
