/** The scan description that some instruments write as one line, a second source for stage, path and activation. */
import type { AnalyserKind, Polarity } from '../model';

export interface FilterStage {
  mz: number;
  /** short names in the order of use, e.g. ['ETD', 'HCD']. */
  activations: string[];
  /** energy of the first activation as written (usually per cent of a normalized scale). */
  energy: number | null;
}

export interface FilterString {
  analyser: AnalyserKind | null;
  polarity: Polarity | null;
  /** true centroid, false profile, null not stated. */
  centroided: boolean | null;
  level: number | null;
  /** one entry for each stage above the spectrum, the MS2 precursor ion first. */
  path: FilterStage[];
}

const ANALYSER_WORDS: ReadonlyMap<string, AnalyserKind> = new Map([
  ['FTMS', 'orbitrap'],
  ['ITMS', 'ion-trap'],
  ['TQMS', 'quadrupole'],
  ['SQMS', 'quadrupole'],
  ['TOFMS', 'tof'],
  ['SECTOR', 'sector']
]);

const LONGEST_ANALYSER = 'SECTOR'.length;
const LONGEST = 2000;
const LEVEL = /\bms(\d{0,2})\b/i;
const MZ_BEFORE = /\d+(?:\.\d+)?$/;
/** Longer numbers are no m/z. */
const LONGEST_MZ = 40;
const ACTIVATION = /@([a-z]+)(\d+(?:\.\d+)?)?/iy;

/** Reads the activations that begin at the `@` at `at`; null when there is none. */
function readActivations(
  text: string,
  at: number
): (Pick<FilterStage, 'activations' | 'energy'> & { end: number }) | null {
  const activations: string[] = [];
  let energy: number | null = null;
  let end = at;
  ACTIVATION.lastIndex = at;
  for (let found = ACTIVATION.exec(text); found; found = ACTIVATION.exec(text)) {
    if (activations.length === 0 && found[2]) energy = Number(found[2]);
    activations.push(found[1].toUpperCase());
    end = ACTIVATION.lastIndex;
  }
  return activations.length > 0 ? { activations, energy, end } : null;
}

/** Every `m/z@activation`, where one m/z may have several activations. */
function readPath(text: string): FilterStage[] {
  const path: FilterStage[] = [];
  for (let at = text.indexOf('@'); at >= 0; at = text.indexOf('@', at)) {
    const mz = MZ_BEFORE.exec(text.slice(Math.max(0, at - LONGEST_MZ), at));
    const found = readActivations(text, at);
    if (mz && found) path.push({ mz: Number(mz[0]), activations: found.activations, energy: found.energy });
    at = found?.end ?? at + 1;
  }
  return path;
}

/** What the words tell: the analyser's name, the sign of polarity, and behind the sign `c` or `p`. */
function readWords(text: string): Pick<FilterString, 'analyser' | 'polarity' | 'centroided'> {
  let analyser: AnalyserKind | null = null;
  let polarity: Polarity | null = null;
  let centroided: boolean | null = null;
  for (let from = 0; from < text.length;) {
    const space = text.indexOf(' ', from);
    const to = space < 0 ? text.length : space;
    if (to - from === 1) {
      const letter = text[from];
      if (polarity === null && (letter === '+' || letter === '-')) polarity = letter === '+' ? 'positive' : 'negative';
      else if (polarity !== null && (letter === 'c' || letter === 'p')) centroided ??= letter === 'c';
    } else if (analyser === null && to - from <= LONGEST_ANALYSER) {
      analyser = ANALYSER_WORDS.get(text.slice(from, to)) ?? null;
    }
    from = to + 1;
  }
  return { analyser, polarity, centroided };
}

/** Reads a filter string; facts it does not hold are null. FTMS does not tell an orbitrap from an ICR cell: orbitrap. */
export function parseFilterString(text: string): FilterString {
  const head = text.slice(0, LONGEST).replace(/[\t\r\n]/g, ' ');
  const level = LEVEL.exec(head);
  return { ...readWords(head), level: level ? (level[1] ? Number(level[1]) : 1) : null, path: readPath(head) };
}
