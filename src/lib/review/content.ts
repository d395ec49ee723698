import type { AnalyserKind, IsolationWindow, Polarity, ScoreTerms, SourceKind, Tolerance } from '../core/model';
import type { TreeSettings } from '../schema/tree';

/**
 * What a revision freezes: everything a reviewer judges. Written as canonical JSON; its SHA-256 is the revision's hash
 * and the file that "JSON of the tree" downloads. Units: m/z without dimension, seconds, ppm, intensities as measured.
 * Rounded: m/z 6 decimals, ppm and scores 3, shares 4, intensities 7 significant digits.
 */
export interface RevisionContent {
  format: 'rivenmark-tree';
  formatVersion: 1;
  tree: FrozenTree;
  study: { id: string; name: string };
  run: FrozenRun;
  settings: TreeSettings;
  spectra: FrozenSpectrum[];
  ions: FrozenIon[];
  /** best-ranked formulas of the precursor, at most five. */
  candidates: FrozenCandidate[];
  /** threads open at the time. */
  remarks: FrozenRemark[];
}

export interface FrozenTree {
  id: string;
  name: string;
  version: number;
  precursorMz: number;
  charge: number | null;
  polarity: Polarity;
  adduct: string | null;
  /** neutral molecule, Hill order. */
  formula: string | null;
  /** a person fixed the formula. */
  formulaFixed: boolean;
  ionFormula: string | null;
  /** of the precursor ion, electrons counted. */
  calculatedMz: number | null;
  errorPpm: number | null;
  /** share 0..1 of the product ion current. */
  explained: number;
  /** level after Schymanski et al. 2014 as a person stated it. */
  confidenceLevel: string | null;
  notes: string[];
}

export interface FrozenRun {
  id: string;
  fileName: string;
  sha256: string;
  instrument: string | null;
  ionSource: SourceKind | null;
  startTime: string | null;
  /** number of scans by stage. */
  scans: Record<string, number>;
}

export interface FrozenSpectrum {
  index: number;
  level: number;
  path: number[];
  parent: number | null;
  linkedBy: 'reference' | 'precursor-list' | 'filter-string' | 'isolated-mz' | 'none';
  isolation: IsolationWindow | null;
  scanCount: number;
  activations: string[];
  energies: number[];
  energyUnit: 'eV' | '%' | null;
  analyser: AnalyserKind;
  /** the window within which a formula counts as fitting. */
  tolerance: Tolerance;
  /** seconds, first and last scan. */
  time: [number, number] | null;
}

export interface FrozenIon {
  id: number;
  spectrum: number;
  mz: number;
  intensity: number;
  scans: number;
  state: 'open' | 'proposed' | 'confirmed' | 'rejected';
  formula: string | null;
  /** signed charge number. */
  charge: number;
  calculatedMz: number | null;
  errorPpm: number | null;
  dbe: number | null;
  oddElectron: boolean | null;
  fromMz: number | null;
  fromFormula: string | null;
  loss: string | null;
  lossRadical: boolean;
  link: 'measured' | 'inferred' | null;
  isPrecursor: boolean;
  flag: string | null;
  score: number | null;
  /** the best other formula within the window. */
  rival: { formula: string; score: number } | null;
  reason: string | null;
  /** name of the person whose decision stands. */
  decidedBy: string | null;
}

export interface FrozenCandidate {
  rank: number;
  formula: string;
  adduct: string;
  errorPpm: number;
  dbe: number;
  score: number;
  terms: ScoreTerms;
  explainedIntensity: number;
}

export interface FrozenRemark {
  id: string;
  anchor: 'tree' | 'spectrum' | 'ion' | 'loss';
  spectrum: number | null;
  ionId: number | null;
  mz: number | null;
  author: string;
  at: string;
  body: string;
  replies: { author: string; at: string; body: string }[];
}

/** Largest intensity of each spectrum, by spectrum index; product ions and precursor alike. */
export function basePeaks(ions: readonly Pick<FrozenIon, 'spectrum' | 'intensity'>[]): Map<number, number> {
  const peaks = new Map<number, number>();
  for (const { spectrum, intensity } of ions) peaks.set(spectrum, Math.max(peaks.get(spectrum) ?? 0, intensity));
  return peaks;
}

/** Percent of the base peak of the ion's spectrum. */
export const relativeIntensity = (
  ion: Pick<FrozenIon, 'spectrum' | 'intensity'>,
  peaks: ReadonlyMap<number, number>
): number => {
  const base = peaks.get(ion.spectrum) ?? 0;
  return base > 0 ? (100 * ion.intensity) / base : 0;
};
