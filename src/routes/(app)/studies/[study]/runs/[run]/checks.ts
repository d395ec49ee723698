import type { RunInfo, RunWarning } from '$lib/core/model';
import { bytesText, plural, ppmText } from '$lib/components/ui/format';
import type { PrecursorRow } from '$lib/schema/run';

/** One line of the run's checks. `good` null: nothing to judge. */
export interface Check {
  name: string;
  words: string;
  good: boolean | null;
}

export interface CheckInput {
  info: RunInfo;
  warnings: RunWarning[];
  precursors: PrecursorRow[];
  bytes: number;
  /** median error of confirmed ions of the run's trees, ppm, and how many there are. */
  massError: { median: number; ions: number } | null;
}

const HIGH_RESOLUTION = new Set(['orbitrap', 'ft-icr', 'tof', 'sector']);

function checksum({ info, bytes }: CheckInput): Check {
  const words = {
    ok: `the SHA-1 in the file fits its ${bytesText(bytes)}`,
    mismatch: 'the SHA-1 in the file does not fit: it was changed after it was written',
    absent: 'the file states none, so a change on the way cannot be told',
    'not-checked': 'could not be checked'
  };
  const found = info.checksum ?? 'not-checked';
  return { name: 'Checksum', words: words[found], good: found === 'ok' ? true : found === 'mismatch' ? false : null };
}

function peakForm({ info, warnings }: CheckInput): Check {
  const scans = Object.values(info.scans).reduce((a, b) => a + b, 0);
  const profile = warnings.find((warning) => warning.code === 'centroided')?.count ?? 0;
  const words =
    profile === 0
      ? 'all scans are centroided in the file'
      : `${profile >= scans ? 'all' : `${profile} of ${scans}`} scans are profile data; centroids were made here`;
  return { name: 'Peaks', words, good: null };
}

/** Full width of the isolation windows, m/z. */
function isolation({ precursors }: CheckInput): Check {
  const widths = precursors.flatMap(({ isolation: window }) =>
    window && window.lower !== null && window.upper !== null ? [window.lower + window.upper] : []
  );
  if (!widths.length) return { name: 'Isolation', words: 'the file states no widths', good: null };
  const [least, most] = [Math.min(...widths), Math.max(...widths)];
  const range = most - least < 0.005 ? most.toFixed(2) : `${least.toFixed(2)} to ${most.toFixed(2)}`;
  const wide = most > 3;
  const words = `windows ${range} m/z wide${wide ? '; neighbouring ions may have been fragmented together' : ''}`;
  return { name: 'Isolation', words, good: wide ? false : null };
}

function massAccuracy({ info, massError }: CheckInput): Check {
  const name = 'Mass accuracy';
  if (massError)
    return {
      name,
      words: `median ${ppmText(massError.median)} ppm over ${plural(massError.ions, 'confirmed ion')}`,
      good: null
    };
  const stated = info.analysers.filter((analyser) => analyser !== 'unknown');
  if (!stated.length)
    return { name, words: 'the file states no analyser; trees are sought within 10 ppm or 2 mDa', good: null };
  const accurate = stated.some((analyser) => HIGH_RESOLUTION.has(analyser));
  const words = accurate
    ? 'cannot be told from the file alone; it shows once ions of a tree are confirmed'
    : 'unit resolution: formulas cannot be told from the m/z alone';
  return { name, words, good: accurate ? null : false };
}

/** What can be judged of a run, in the order in which a person would ask. */
export const checksOf = (input: CheckInput): Check[] => [
  checksum(input),
  peakForm(input),
  isolation(input),
  massAccuracy(input)
];

/** Warnings that the checks above have said already. */
export const isOwnCheck = (warning: RunWarning): boolean => ['centroided', 'checksum'].includes(warning.code);
