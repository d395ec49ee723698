import { z } from 'zod';
import type { FormulaCandidate, IonAlternative, Polarity, ScoreTerms, TreeSpectrum } from '../core/model';
import type { Role } from './group';
import { treeSettingsSchema, type TreeSettings } from './tree';

/** Confidence levels of an identification (Schymanski et al. 2014, Environ. Sci. Technol. 48, 2097). */
export const CONFIDENCE_LEVELS = ['1', '2a', '2b', '3', '4', '5'] as const;

/** A change of the tree itself. `version` is the tree version that the person saw; absent fields stay as they are. */
export const treePatchSchema = z
  .object({
    version: z.number().int().positive(),
    name: z.string().trim().min(1, 'Give the tree a name.').max(160).optional(),
    settings: treeSettingsSchema.optional(),
    /** neutral formula of M to fix; null frees it, so that the next suggestion ranks again. */
    formula: z.string().trim().max(120).nullable().optional(),
    /** ion type that goes with a fixed formula. */
    adduct: z.string().trim().max(60).nullable().optional(),
    confidenceLevel: z.enum(CONFIDENCE_LEVELS).nullable().optional()
  })
  .refine((patch) => Object.values(patch).some((v, i) => i > 0 && v !== undefined), 'Nothing to change was sent.');
export type TreePatch = z.infer<typeof treePatchSchema>;

export type ClaimStateName = 'open' | 'proposed' | 'confirmed' | 'rejected';

/** Bits of `IonColumns.bits`. */
export const ION_BITS = {
  lossRadical: 1,
  measured: 2,
  inferred: 4,
  precursor: 8,
  oddElectron: 16,
  decided: 32
} as const;

/** All ions of a tree as parallel columns, ordered by spectrum and m/z: ten thousand ions stay below one megabyte. */
export interface IonColumns {
  /** formulas, losses and flags; columns refer to them by index, −1 = none. */
  strings: string[];
  id: number[];
  spectrum: number[];
  mz: number[];
  /** as measured */
  intensity: number[];
  /** scans that held the ion */
  scans: number[];
  /** one letter an ion: o(pen), p(roposed), c(onfirmed), r(ejected) */
  state: string;
  formula: number[];
  /** signed charge number */
  charge: number[];
  errorPpm: (number | null)[];
  dbe: (number | null)[];
  loss: number[];
  fromMz: (number | null)[];
  fromFormula: number[];
  bits: number[];
  flag: number[];
  score: (number | null)[];
  version: number[];
  /** why a person decided so, by ion id */
  reasons: Record<number, string>;
}

export interface SpectrumView extends Pick<
  TreeSpectrum,
  'index' | 'level' | 'path' | 'parent' | 'linkedBy' | 'isolation' | 'activations' | 'energies' | 'energyUnit' | 'time'
> {
  analyser: TreeSpectrum['analyser'];
  scanCount: number;
}

export interface TreeFacts {
  id: string;
  name: string;
  studyId: string;
  runId: string;
  runName: string;
  precursorMz: number;
  charge: number | null;
  polarity: Polarity;
  adduct: string | null;
  formula: string | null;
  /** composition of the precursor ion under formula and adduct; null when either is unknown. */
  ionFormula: string | null;
  formulaFixed: boolean;
  settings: TreeSettings;
  notes: string[];
  /** share 0..1 of the product ion current. */
  explained: number;
  status: 'draft' | 'in-review' | 'changes-asked' | 'approved';
  confidenceLevel: string | null;
  version: number;
  suggestedAt: string | null;
  /** the newest frozen revision. */
  revision: { number: number; status: string } | null;
}

export interface JobView {
  id: string;
  kind: string;
  state: string;
  progress: { done: number; total: number; what: string };
}

/** Everything that the workbench draws at once. */
export interface WorkbenchView {
  tree: TreeFacts;
  ms1: { mz: number[]; intensity: number[] } | null;
  spectra: SpectrumView[];
  ions: IonColumns;
  candidates: FormulaCandidate[];
  /** open threads: all, on the tree, by spectrum index, by ion id (loss remarks count at their ion). */
  remarks: { open: number; tree: number; spectra: Record<number, number>; ions: Record<number, number> };
  role: Role;
  can: {
    edit: boolean;
    decide: boolean;
    remark: boolean;
    requestReview: boolean;
    review: boolean;
    report: boolean;
  };
  /** queued and running work on this tree. */
  jobs: JobView[];
}

/** One decision in an ion's past. */
export interface HistoryEntry {
  id: number;
  action: 'proposed' | 'confirmed' | 'rejected' | 'opened' | 'undone';
  /** name of the person, or the program */
  who: string;
  at: string;
  before: { state: ClaimStateName; formula: string | null };
  after: { state: ClaimStateName; formula: string | null };
  reason: string | null;
}

/** The same m/z in one spectrum of the tree. */
export interface Sighting {
  spectrum: number;
  ionId: number;
  version: number;
  mz: number;
  intensity: number;
  /** percent of the base peak of its spectrum */
  relative: number;
  scans: number;
  scanTotal: number;
  state: ClaimStateName;
  formula: string | null;
}

/** Share 0..1 of the ion in the ion current of the scans taken at one energy. */
export interface BreakdownPoint {
  energy: number;
  share: number;
  scans: number;
}

export interface IonDetail {
  id: number;
  version: number;
  alternatives: IonAlternative[];
  terms: ScoreTerms;
  decidedBy: string | null;
  decidedAt: string | null;
  reason: string | null;
  history: HistoryEntry[];
  seen: Sighting[];
  breakdown: { unit: 'eV' | '%' | null; points: BreakdownPoint[] } | null;
  /** peaks of the same spectrum at isotope distances; `relative` is percent of this ion. */
  isotopes: { label: string; mz: number; relative: number; expected: number | null }[];
  /** half width of the window in m/z and in ppm that was used to recognise the ion elsewhere. */
  window: { mz: number; ppm: number };
}

/** What a decision made of an ion; the client patches its columns with it. */
export interface IonAfter {
  id: number;
  version: number;
  state: ClaimStateName;
  formula: string | null;
  errorPpm: number | null;
  dbe: number | null;
  oddElectron: boolean | null;
  loss: string | null;
  lossRadical: boolean;
  fromMz: number | null;
  fromFormula: string | null;
  link: 'measured' | 'inferred' | null;
  score: number | null;
  reason: string | null;
  decided: boolean;
}

export interface ClaimsResult {
  treeVersion: number;
  explained: number;
  status: TreeFacts['status'];
  ions: IonAfter[];
}

/** Details of a 409: what somebody else made of an ion in the meantime. */
export interface ClaimConflict {
  ionId: number;
  mz: number;
  version: number;
  state: ClaimStateName;
  formula: string | null;
  action: HistoryEntry['action'] | null;
  who: string | null;
  at: string | null;
}
