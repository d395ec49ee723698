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
const LEVEL = /ms(\d{0,2})\b/iy;
const SPACE = 32;
const LOWER = 32;
const M = 109;
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

type Words = Pick<FilterString, 'analyser' | 'polarity' | 'centroided' | 'level'>;

const isWordLetter = (code: number) =>
  (code >= 48 && code <= 57) || (code >= 65 && code <= 90) || code === 95 || (code >= 97 && code <= 122);

/** The stage where `ms`, `ms2` and the like begin at `at`; null where they do not. */
function levelAt(text: string, at: number): number | null {
  LEVEL.lastIndex = at;
  const found = LEVEL.exec(text);
  return found && (found[1] ? Number(found[1]) : 1);
}

/** What the words tell: the analyser's name, the sign of polarity, behind the sign `c` or `p`, and the stage. */
function readWords(text: string): Words {
  const words: Words = { analyser: null, polarity: null, centroided: null, level: null };
  let from = 0;
  let before = SPACE;
  for (let i = 0; i <= text.length; i++) {
    const code = i < text.length ? text.charCodeAt(i) : SPACE;
    if ((code | LOWER) === M && words.level === null && !isWordLetter(before)) words.level = levelAt(text, i);
    before = code;
    if (code > SPACE) continue;
    if (i - from === 1) takeLetter(text[from], words);
    else if (words.analyser === null && i - from <= LONGEST_ANALYSER) {
      words.analyser = ANALYSER_WORDS.get(text.slice(from, i)) ?? null;
    }
    from = i + 1;
  }
  return words;
}

function takeLetter(letter: string, words: Words): void {
  if (words.polarity === null) {
    if (letter === '+') words.polarity = 'positive';
    else if (letter === '-') words.polarity = 'negative';
  } else if (letter === 'c' || letter === 'p') words.centroided ??= letter === 'c';
}

/** Reads a filter string; facts it does not hold are null. FTMS does not tell an orbitrap from an ICR cell: orbitrap. */
export function parseFilterString(text: string): FilterString {
  const head = text.slice(0, LONGEST);
  return { ...readWords(head), path: readPath(head) };
}
