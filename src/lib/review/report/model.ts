import { basePeaks, relativeIntensity, type FrozenIon, type FrozenSpectrum, type RevisionContent } from '../content';
import { claimedConfidence, type Confidence } from './confidence';
import { methodsText } from './methods';
import type { ReportOptions } from './options';

/** One line of the table of ions. Intensity is percent of the base peak of its spectrum. */
export interface ReportRow {
  ionId: number;
  spectrum: number;
  level: number;
  /** isolated m/z of each stage. */
  path: number[];
  found: number;
  calculated: number | null;
  errorPpm: number | null;
  formula: string | null;
  charge: number;
  oddElectron: boolean;
  dbe: number | null;
  loss: string | null;
  lossRadical: boolean;
  fromFormula: string | null;
  link: 'measured' | 'inferred' | null;
  isPrecursor: boolean;
  intensity: number;
  scans: number;
  state: FrozenIon['state'];
  confirmedBy: string | null;
}

export interface Approval {
  name: string;
  /** ISO instant, UTC. */
  at: string;
}

/** Where the content comes from: a frozen revision or the tree as it stands. */
export interface ReportSource {
  revision: number | null;
  status: 'draft' | 'in-review' | 'changes-asked' | 'approved' | 'superseded' | 'withdrawn';
  hash: string;
  approvals: Approval[];
  /** ISO instant of freezing, or of printing for a draft. */
  at: string;
}

export interface Report {
  title: string;
  study: string;
  /** 'Draft' goes across every page. */
  draft: boolean;
  /** in words, e.g. "revision 2, approved". */
  status: string;
  source: ReportSource;
  tree: RevisionContent['tree'];
  run: RevisionContent['run'];
  spectra: FrozenSpectrum[];
  rows: ReportRow[];
  columns: ReportOptions['columns'];
  figure: ReportOptions['figure'];
  /** ions left out by the choice. */
  leftOut: number;
  unitResolution: boolean;
  methods: string[];
  confidence: Confidence;
  openRemarks: number;
}

/** Decimals of m/z: unit resolution knows one. */
export const mzDecimals = (report: Pick<Report, 'unitResolution'>): number => (report.unitResolution ? 1 : 4);

/** Says how many ions the reader's choice left out. */
export const leftOutText = (n: number): string =>
  n === 1 ? 'One ion is not listed by choice.' : `${n} ions are not listed by choice.`;

function chosen(ion: FrozenIon, ions: ReportOptions['ions']): boolean {
  if (ions === 'all') return true;
  if (ion.formula === null) return false;
  return ion.state === 'confirmed' || (ions === 'explained' && ion.state === 'proposed');
}

function rowOf(ion: FrozenIon, spectrum: FrozenSpectrum, peaks: ReadonlyMap<number, number>): ReportRow {
  // A rejected formula is no assignment: the table shows the ion as unassigned.
  const assigned = ion.state !== 'rejected' && ion.formula !== null;
  return {
    ionId: ion.id,
    spectrum: ion.spectrum,
    level: spectrum.level,
    path: spectrum.path,
    found: ion.mz,
    calculated: assigned ? ion.calculatedMz : null,
    errorPpm: assigned ? ion.errorPpm : null,
    formula: assigned ? ion.formula : null,
    charge: ion.charge,
    oddElectron: assigned && ion.oddElectron === true,
    dbe: assigned ? ion.dbe : null,
    loss: assigned ? ion.loss : null,
    lossRadical: assigned && ion.lossRadical,
    fromFormula: assigned ? ion.fromFormula : null,
    link: assigned ? ion.link : null,
    isPrecursor: ion.isPrecursor,
    intensity: relativeIntensity(ion, peaks),
    scans: ion.scans,
    state: ion.state,
    confirmedBy: ion.state === 'confirmed' ? ion.decidedBy : null
  };
}

const STATUS_WORDS = {
  draft: 'not approved',
  'in-review': 'under review',
  'changes-asked': 'changes asked',
  approved: 'approved',
  superseded: 'superseded before approval',
  withdrawn: 'withdrawn before approval'
} as const;

/** Everything that page, PDF, CSV and figure show, from frozen content and the reader's choices. Pure. */
export function buildReport(content: RevisionContent, source: ReportSource, options: ReportOptions): Report {
  const peaks = basePeaks(content.ions);
  const spectra = new Map(content.spectra.map((s) => [s.index, s]));
  const rows = content.ions
    .filter((ion) => chosen(ion, options.ions) && spectra.has(ion.spectrum))
    .map((ion) => rowOf(ion, spectra.get(ion.spectrum)!, peaks))
    .sort((a, b) => a.level - b.level || a.spectrum - b.spectrum || b.found - a.found);
  const draft = source.status !== 'approved';
  const name = source.revision === null ? 'draft' : `revision ${source.revision}`;
  return {
    title: content.tree.name,
    study: content.study.name,
    draft,
    status: `${name}, ${STATUS_WORDS[source.status]}`,
    source,
    tree: content.tree,
    run: content.run,
    spectra: content.spectra,
    rows,
    columns: options.columns,
    figure: options.figure,
    leftOut: content.ions.length - rows.length,
    unitResolution: content.spectra.length > 0 && content.spectra.every((s) => s.tolerance.mda >= 50),
    methods: methodsText(content),
    confidence: claimedConfidence(content.tree.confidenceLevel),
    openRemarks: content.remarks.length
  };
}
