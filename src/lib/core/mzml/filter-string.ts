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

const LONGEST = 2000;
const LEVEL = /\bms(\d{0,2})\b/i;
const STAGE = /(\d+(?:\.\d+)?)((?:@[a-z]+\d*(?:\.\d+)?)+)/gi;
const ACTIVATION = /@([a-z]+)(\d+(?:\.\d+)?)?/gi;

function readStage(mz: string, text: string): FilterStage {
  const activations: string[] = [];
  let energy: number | null = null;
  for (const [, name, written] of text.matchAll(ACTIVATION)) {
    if (activations.length === 0 && written) energy = Number(written);
    activations.push(name.toUpperCase());
  }
  return { mz: Number(mz), activations, energy };
}

/** What the words tell: the analyser's name, the sign of polarity, and behind the sign `c` or `p`. */
function readWords(text: string): Pick<FilterString, 'analyser' | 'polarity' | 'centroided'> {
  let analyser: AnalyserKind | null = null;
  let polarity: Polarity | null = null;
  let centroided: boolean | null = null;
  for (const word of text.split(' ')) {
    analyser ??= ANALYSER_WORDS.get(word) ?? null;
    if (polarity === null && (word === '+' || word === '-')) polarity = word === '+' ? 'positive' : 'negative';
    else if (polarity !== null && centroided === null && (word === 'c' || word === 'p')) centroided = word === 'c';
  }
  return { analyser, polarity, centroided };
}

/** Reads a filter string; facts it does not hold are null. FTMS does not tell an orbitrap from an ICR cell: orbitrap. */
export function parseFilterString(text: string): FilterString {
  const head = text.slice(0, LONGEST).replace(/[\t\r\n]/g, ' ');
  const level = LEVEL.exec(head);
  const path: FilterStage[] = [];
  if (head.includes('@')) for (const [, mz, activations] of head.matchAll(STAGE)) path.push(readStage(mz, activations));
  return { ...readWords(head), level: level ? (level[1] ? Number(level[1]) : 1) : null, path };
}
