/**
 * The shared vocabulary of the core: what a run, a scan, an assembled tree and a suggestion are made of.
 * Units: m/z is dimensionless, masses in u (Da), times in seconds, mass errors in ppm, intensities as measured
 * (counts or arbitrary units of the file). Optional facts that a file does not state are null, never guessed silently.
 */

export type Polarity = 'positive' | 'negative';
export type AnalyserKind = 'orbitrap' | 'ft-icr' | 'tof' | 'quadrupole' | 'ion-trap' | 'sector' | 'unknown';
export type SourceKind = 'ESI' | 'APCI' | 'APPI' | 'MALDI' | 'EI' | 'CI' | 'unknown';

/** Peaks of one spectrum, sorted by m/z, parallel arrays. */
export interface PeakList {
  mz: Float64Array;
  intensity: Float64Array;
}

/** The window that was isolated: target m/z with its lower and upper half widths (null where the file gives none). */
export interface IsolationWindow {
  target: number;
  lower: number | null;
  upper: number | null;
}

/** One `precursor` element of a spectrum. */
export interface PrecursorRecord {
  /** id of the scan it was isolated from, as written; null where the file gives none. */
  spectrumRef: string | null;
  /** stage of that scan where the file states it (userParam "ms level"), else null. */
  level: number | null;
  isolation: IsolationWindow | null;
  /** m/z of the selected ion, possibly reassigned to the monoisotopic peak by the instrument software. */
  selectedMz: number | null;
  /** charge number, positive; null when unknown or 0. */
  charge: number | null;
  intensity: number | null;
  /** short names, e.g. CID, HCD, ETD, UVPD. */
  activations: string[];
  /** as written in the file; null when absent. */
  energy: number | null;
  energyUnit: 'eV' | '%' | null;
}

/** Everything of a scan except its peaks. */
export interface ScanHeader {
  /** position in the file, from 0. */
  index: number;
  /** native id, e.g. "controllerType=0 controllerNumber=1 scan=17". */
  id: string;
  level: number;
  polarity: Polarity | null;
  /** seconds; null when absent. */
  time: number | null;
  centroided: boolean;
  /** true when the core made the centroids from profile data. */
  centroidedHere: boolean;
  totalIonCurrent: number;
  basePeakMz: number | null;
  basePeakIntensity: number | null;
  precursors: PrecursorRecord[];
  filterString: string | null;
  analyser: AnalyserKind;
  peakCount: number;
}

export interface Scan extends ScanHeader {
  peaks: PeakList;
}

/** Facts of the whole file. */
export interface RunInfo {
  polarity: Polarity | 'mixed' | null;
  ionSource: SourceKind;
  analysers: AnalyserKind[];
  instrument: string | null;
  startTime: string | null;
  /** number of scans by stage, e.g. {"1": 4, "2": 12}. */
  scans: Record<string, number>;
  /** whether the SHA-1 that the file states fits its bytes. */
  checksum?: 'ok' | 'mismatch' | 'absent' | 'not-checked';
}

/** Something the reader noticed and what it did about it. `code` is stable, `message` is for people. */
export interface RunWarning {
  code: string;
  message: string;
  /** scan ids concerned, at most 20; `count` is the full number. */
  scans: string[];
  count: number;
}

/** One merged spectrum of a tree: all scans that isolated the same path (and energy, where kept apart). */
export interface TreeSpectrum {
  /** position in `AssembledTree.spectra`. */
  index: number;
  level: number;
  /** isolated m/z at each stage above this spectrum, MS2 precursor first; length = level - 1. */
  path: number[];
  /** index of the parent spectrum in the tree, null for the MS2 spectrum or when the parent was not measured. */
  parent: number | null;
  /** how the parent was found. */
  linkedBy: 'reference' | 'precursor-list' | 'filter-string' | 'isolated-mz' | 'none';
  isolation: IsolationWindow | null;
  scanIds: string[];
  activations: string[];
  energies: number[];
  energyUnit: 'eV' | '%' | null;
  analyser: AnalyserKind;
  /** seconds, first and last scan. */
  time: [number, number] | null;
  peaks: PeakList;
  /** number of scans that held each ion, parallel to `peaks`. */
  scanCounts: Uint16Array;
}

export interface AssembledTree {
  /** m/z of the MS2 precursor ion (selected ion where given, else the isolation target). */
  precursorMz: number;
  /** charge number stated by the file, positive; null when unknown. */
  charge: number | null;
  polarity: Polarity;
  /** ordered by stage, then path; the first is the MS2 spectrum where one was measured. */
  spectra: TreeSpectrum[];
  /** MS1 peaks around the precursor (−1 to +6 m/z) merged over the MS1 scans nearest to its MSn scans; null without MS1. */
  ms1: PeakList | null;
  /** plain words about what could not be joined. */
  notes: string[];
}

/** Scans that belong to no tree, kept and named. */
export interface Orphan {
  scanId: string;
  level: number;
  reason: string;
}

export interface Assembly {
  trees: AssembledTree[];
  orphans: Orphan[];
  warnings: RunWarning[];
}

/** Tolerance at an m/z is the larger of the two windows: max(ppm · mz · 1e-6, mda · 1e-3). */
export interface Tolerance {
  ppm: number;
  mda: number;
}

/** A formula's element counts, e.g. {C: 8, H: 10, N: 4, O: 2}; absent elements count 0. */
export type Composition = Readonly<Record<string, number>>;

/** Inclusive range of each allowed element. */
export type ElementRanges = Readonly<Record<string, readonly [min: number, max: number]>>;

/** A person's decision, a hard constraint of the next suggestion. */
export interface IonConstraint {
  spectrum: number;
  mz: number;
  kind: 'confirmed' | 'rejected';
  /** ion formula in Hill order; for 'rejected', null rejects every formula. */
  formula: string | null;
}

export interface SuggestOptions {
  /** adducts to consider by name, e.g. ['[M+H]+']; empty: the usual ones for source and polarity. */
  adducts: string[];
  /** neutral formula of M when known: no ranking. */
  formula: string | null;
  elements: ElementRanges;
  /** null: by the analyser of each spectrum. */
  tolerance: Tolerance | null;
  /** number of precursor formulas to report. */
  top: number;
  ionSource: SourceKind;
  constraints: IonConstraint[];
}

/** Named terms of a score, natural-log units, summing to the score. */
export interface ScoreTerms {
  [name: string]: number;
}

export interface FormulaCandidate {
  rank: number;
  /** neutral molecule M, Hill order. */
  formula: string;
  adduct: string;
  /** ion composition, Hill order, without charge. */
  ionFormula: string;
  errorPpm: number;
  dbe: number;
  score: number;
  terms: ScoreTerms;
  /** share 0..1 of the product ion current that the tree under this formula explains. */
  explainedIntensity: number;
}

export interface IonAlternative {
  formula: string;
  errorPpm: number;
  dbe: number;
  oddElectron: boolean;
  /** loss from the ion it is attached to, Hill order; null for the precursor ion itself. */
  loss: string | null;
  score: number;
  terms: ScoreTerms;
}

/** One ion (peak) of one merged spectrum, annotated. */
export interface AnnotatedIon {
  mz: number;
  intensity: number;
  /** ion composition in Hill order; null where nothing is proposed. */
  formula: string | null;
  charge: number;
  errorPpm: number | null;
  dbe: number | null;
  oddElectron: boolean | null;
  fromMz: number | null;
  /** ion formula it came from. */
  fromFormula: string | null;
  loss: string | null;
  lossRadical: boolean;
  /** 'measured': this spectrum isolated the ion it came from; 'inferred': arithmetic alone. null for open and precursor ions. */
  link: 'measured' | 'inferred' | null;
  /** the intact precursor of this spectrum. */
  isPrecursor: boolean;
  /** why an ion is open on purpose: 'isotope' (satellite of another ion), 'above-precursor', 'noise', null otherwise. */
  remark: 'isotope' | 'above-precursor' | 'noise' | null;
  score: number | null;
  terms: ScoreTerms;
  /** every candidate within the tolerance, best first, the chosen one included. */
  alternatives: IonAlternative[];
}

export interface Suggestion {
  charge: number;
  adduct: string | null;
  candidates: FormulaCandidate[];
  /** parallel to `AssembledTree.spectra`, each parallel to its peaks; under the first-ranked (or given) formula. */
  spectra: AnnotatedIon[][];
  /** 0..1 over all product ions. */
  explainedIntensity: number;
  /** plain words: what was not explored or is ambiguous, e.g. unit resolution. */
  notes: string[];
}
