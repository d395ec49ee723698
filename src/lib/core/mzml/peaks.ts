/** From the decoded arrays of a spectrum to a clean, sorted peak list. */
import { CoreError } from '../errors';
import type { PeakList } from '../model';
import { decodeArray, describeArray } from './arrays';
import type { ReadSettings } from './options';
import { Params, type ParamGroups } from './params';
import type { BinaryText, SpectrumRecord } from './record';
import type { WarningCollector } from './warnings';

export const NO_PEAKS: PeakList = { mz: new Float64Array(0), intensity: new Float64Array(0) };

/** What the list of arrays offers. */
export interface ArraySet {
  mz: Float64Array | null;
  intensity: Float64Array | null;
  /** number of arrays of any kind. */
  count: number;
  /** an array states another length of its base64 text than it has. */
  wrongLength: boolean;
}

function declaredLength(text: string | null, fallback: number): number {
  const value = text === null ? fallback : Number(text);
  return Number.isInteger(value) && value >= 0 ? value : fallback;
}

/** True when the stated length fits neither the text as it stands nor the text without white space. */
function isWrongLength(stated: string | null, text: Uint8Array): boolean {
  const length = Number(stated ?? NaN);
  if (!Number.isFinite(length) || length === text.length) return false;
  let letters = 0;
  for (const byte of text) if (byte > 32) letters++;
  return length !== letters;
}

const NO_TEXT: BinaryText = { bytes: new Uint8Array(0), text: '' };

/** Finds and decodes the m/z and intensity arrays; every other array is left alone. */
export function readArrays(
  record: SpectrumRecord,
  binaries: readonly BinaryText[],
  groups: ParamGroups,
  settings: ReadSettings
): ArraySet {
  const set: ArraySet = { mz: null, intensity: null, count: 0, wrongLength: false };
  const declared = Number(record.defaultArrayLength ?? 0) || 0;
  let at = 0;
  for (const array of record.arrays) {
    const text = (array.hasBinary ? binaries[at++] : undefined) ?? NO_TEXT;
    set.count++;
    set.wrongLength ||= isWrongLength(array.encodedLength, text.bytes);
    const description = describeArray(Params.of(array.params, groups));
    const kind = description.kind;
    if (kind === 'other' || set[kind] !== null) continue;
    if (!settings.peaks) set[kind] = new Float64Array(0);
    else set[kind] = decodeArray(text, description, declaredLength(array.arrayLength, declared), settings);
  }
  return set;
}

function isUsable(mz: number, intensity: number): boolean {
  return mz >= 0 && mz < Infinity && intensity >= 0 && intensity < Infinity;
}

/** Sorted by m/z, equal m/z in the order written. */
function sorted(mz: Float64Array, intensity: Float64Array): PeakList {
  const order = Array.from(mz, (_value, i) => i).sort((a, b) => mz[a] - mz[b] || a - b);
  return { mz: Float64Array.from(order, (i) => mz[i]), intensity: Float64Array.from(order, (i) => intensity[i]) };
}

/**
 * Pairs m/z with intensity: unequal lengths are cut to the shorter, impossible values dropped, unsorted points sorted,
 * each with a warning.
 * @throws CoreError `bad-array` when only one of the two arrays is there.
 */
export function pairPeaks(set: ArraySet, id: string, declared: number, warnings: WarningCollector): PeakList {
  const { mz, intensity } = set;
  if ((mz === null) !== (intensity === null) && (mz?.length ?? intensity?.length ?? 0) > 0) {
    throw new CoreError('bad-array', `The spectrum has no ${mz === null ? 'm/z' : 'intensity'} array`);
  }
  if (mz === null || intensity === null) return NO_PEAKS;
  const count = Math.min(mz.length, intensity.length);
  if (mz.length !== intensity.length) {
    warnings.add('array-lengths', 'Arrays of m/z and intensity differ in length; the shorter length was used', id);
  } else if (count !== declared) {
    warnings.add('declared-length', 'The number of points differs from the declared one; the points were all read', id);
  }
  return clean(mz.subarray(0, count), intensity.subarray(0, count), id, warnings);
}

function clean(mz: Float64Array, intensity: Float64Array, id: string, warnings: WarningCollector): PeakList {
  let usable = true;
  let ordered = true;
  let before = -Infinity;
  for (let i = 0; i < mz.length; i++) {
    const value = mz[i];
    if (!isUsable(value, intensity[i])) usable = false;
    if (value < before) ordered = false;
    before = value;
  }
  let peaks: PeakList = { mz, intensity };
  if (!usable) {
    warnings.add('impossible-values', 'Points with a negative or undefined m/z or intensity were left out', id);
    peaks = {
      mz: mz.filter((value, i) => isUsable(value, intensity[i])),
      intensity: intensity.filter((value, i) => isUsable(mz[i], value))
    };
    ordered = peaks.mz.every((value, i, all) => i === 0 || value >= all[i - 1]);
  }
  if (!ordered) {
    warnings.add('unsorted', 'Points were not in order of m/z and have been sorted', id);
    return sorted(peaks.mz, peaks.intensity);
  }
  return peaks;
}
