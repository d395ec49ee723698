/** The JSON of the command: names and order of fields, and how many digits are written. */
import type {
  AnnotatedIon,
  AssembledTree,
  FormulaCandidate,
  RunInfo,
  RunWarning,
  Suggestion,
  TreeSpectrum
} from '../lib/core/model';

export const FORMAT = 'rivenmark-annotation';
export const VERSION = 1;

/** m/z to 10^-6, errors to 10^-3 ppm, scores and shares to 10^-4; intensity to 7 significant digits. */
const round = (value: number, digits: number): number => {
  const rounded = Number(value.toFixed(digits));
  return rounded === 0 ? 0 : rounded;
};
const orNull = (value: number | null, digits: number): number | null => (value === null ? null : round(value, digits));
const significant = (value: number): number => Number(value.toPrecision(7));

function ionJson(ion: AnnotatedIon) {
  return {
    mz: round(ion.mz, 6),
    intensity: significant(ion.intensity),
    formula: ion.formula,
    charge: ion.charge,
    errorPpm: orNull(ion.errorPpm, 3),
    fromMz: orNull(ion.fromMz, 6),
    loss: ion.loss,
    lossRadical: ion.lossRadical,
    link: ion.link,
    score: orNull(ion.score, 4),
    alternatives: ion.alternatives
      .filter((other) => other.formula !== ion.formula)
      .map((other) => ({ formula: other.formula, errorPpm: round(other.errorPpm, 3), score: round(other.score, 4) }))
  };
}

/** An ion of a tree for which nothing was computed. */
function plainIons(spectrum: TreeSpectrum, charge: number): ReturnType<typeof ionJson>[] {
  return Array.from(spectrum.peaks.mz, (mz, i) => ({
    mz: round(mz, 6),
    intensity: significant(spectrum.peaks.intensity[i]),
    formula: null,
    charge,
    errorPpm: null,
    fromMz: null,
    loss: null,
    lossRadical: false,
    link: null,
    score: null,
    alternatives: []
  }));
}

function spectrumJson(spectrum: TreeSpectrum, ions: ReturnType<typeof ionJson>[]) {
  return {
    level: spectrum.level,
    path: spectrum.path.map((mz) => round(mz, 6)),
    scanIds: spectrum.scanIds,
    activations: spectrum.activations,
    energies: spectrum.energies,
    ions
  };
}

function candidateJson(candidate: FormulaCandidate) {
  return {
    rank: candidate.rank,
    formula: candidate.formula,
    adduct: candidate.adduct,
    ionFormula: candidate.ionFormula,
    errorPpm: round(candidate.errorPpm, 3),
    score: round(candidate.score, 4),
    explainedIntensity: round(candidate.explainedIntensity, 4)
  };
}

/** One tree with its suggestion; null where none could be made. */
export function treeJson(tree: AssembledTree, suggestion: Suggestion | null) {
  const sign = tree.polarity === 'positive' ? 1 : -1;
  const charge = suggestion?.charge ?? tree.charge ?? 1;
  const signed = Math.abs(charge) * sign;
  return {
    precursorMz: round(tree.precursorMz, 6),
    charge: signed,
    adduct: suggestion?.adduct ?? null,
    formulaCandidates: (suggestion?.candidates ?? []).map(candidateJson),
    spectra: tree.spectra.map((spectrum, i) =>
      spectrumJson(spectrum, suggestion ? suggestion.spectra[i].map(ionJson) : plainIons(spectrum, signed))
    )
  };
}

export type TreeJson = ReturnType<typeof treeJson>;

/** The object for one file. */
export function fileJson(file: string, sha1: string, info: RunInfo, trees: TreeJson[], warnings: string[]) {
  return {
    format: FORMAT,
    version: VERSION,
    run: {
      file,
      sha1,
      polarity: info.polarity,
      ionSource: info.ionSource,
      analysers: info.analysers,
      scans: info.scans
    },
    trees,
    warnings
  };
}

/** The object for a file that cannot be read. */
export function errorJson(file: string, error: string) {
  return { format: FORMAT, version: VERSION, run: { file }, error };
}

/** A reader's warning as one line of plain words. */
export function warningText(warning: RunWarning): string {
  if (warning.scans.length === 0) return `${warning.message}.`;
  const more = warning.count > 3 ? `, … (${warning.count} scans)` : '';
  return `${warning.message}: ${warning.scans.slice(0, 3).join(', ')}${more}.`;
}
