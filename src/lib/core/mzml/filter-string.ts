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

const ANALYSER_WORDS: Readonly<Record<string, AnalyserKind>> = {
  FTMS: 'orbitrap',
  ITMS: 'ion-trap',
  TQMS: 'quadrupole',
  SQMS: 'quadrupole',
  TOFMS: 'tof',
  SECTOR: 'sector'
};

const STAGE = /(\d+(?:\.\d+)?)((?:@[a-z]+\d*(?:\.\d+)?)+)/gi;
const ACTIVATION = /@([a-z]+)(\d+(?:\.\d+)?)?/gi;

function readStage(mz: string, activations: string): FilterStage {
  const parts = [...activations.matchAll(ACTIVATION)];
  return {
    mz: Number(mz),
    activations: parts.map((part) => part[1].toUpperCase()),
    energy: parts[0]?.[2] ? Number(parts[0][2]) : null
  };
}

/** Reads a filter string; facts it does not hold are null. FTMS does not tell an orbitrap from an ICR cell: orbitrap. */
export function parseFilterString(text: string): FilterString {
  const head = text.slice(0, 2000);
  const words = head.trim().split(/\s+/);
  const signAt = words.findIndex((word) => word === '+' || word === '-');
  const shape = signAt >= 0 ? words.slice(signAt + 1).find((word) => /^[cp]$/.test(word)) : undefined;
  const level = /\bms(\d{0,2})\b/i.exec(head.replace(/[A-Z]{2,6}MS\b/g, ''));
  return {
    analyser: words.map((word) => ANALYSER_WORDS[word]).find(Boolean) ?? null,
    polarity: signAt < 0 ? null : words[signAt] === '+' ? 'positive' : 'negative',
    centroided: shape === undefined ? null : shape === 'c',
    level: level ? (level[1] ? Number(level[1]) : 1) : null,
    path: [...head.matchAll(STAGE)].map((stage) => readStage(stage[1], stage[2]))
  };
}
