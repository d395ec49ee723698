/** The command line of `annotate`: reading, checking, explaining. */
import { parseArgs } from 'node:util';
import { parseAdduct, parseElementRanges, parseFormula } from '../lib/core/chem';
import { CoreError } from '../lib/core/errors';
import type { Tolerance } from '../lib/core/model';
import { DEFAULT_ELEMENTS, defaultSuggestOptions } from '../lib/core/suggest';
import type { AnnotateOptions } from './annotate-file';

/** The call is wrong; the message is one line. */
export class CallError extends Error {}

export interface Call {
  help: boolean;
  paths: string[];
  options: AnnotateOptions;
}

export const HELP = `Usage: npm run --silent annotate -- FILE.mzML[.gz] ... [options]

Reads mzML 1.1 files (plain or gzipped), assembles their fragmentation trees, ranks formulas of each precursor ion and
annotates every stage. JSON goes to standard output, progress and warnings to standard error.
Several files, or a folder (its .mzML and .mzML.gz files by name): one JSON object a line, in the order given.

Options
  --precursor-mz MZ    only the tree whose MS2 precursor ion lies within the isolation window, or 0.01, of MZ (m/z)
                       default: all precursor ions
  --adduct A           ion type of the precursor, e.g. [M+H]+, [M+Na]+, [M-H]-, [M]+; [M]+• is a radical cation
                       default: the usual ones for ion source and polarity
  --formula F          neutral molecular formula of M when it is known: nothing is ranked, all is annotated under it
                       default: formulas are ranked
  --elements E         element ranges of M, e.g. C0-60H0-120N0-10O0-20S0-2 (numbers of atoms)
                       default: ${DEFAULT_ELEMENTS}
  --tolerance-ppm X    half width of the mass window in ppm
  --tolerance-mda Y    half width of the mass window in mDa (m/z 0.001); of both, the larger holds at each m/z
                       default: by the analyser of each scan
  --top N              number of precursor formulas to report, 1 to 1000
                       default: 10
  --merge-energies     merge spectra of one isolation path across collision energies to one spectrum
                       default: each energy keeps its own spectrum
  --help               this text

Exit status
  0  done (of several files, at least one was read; the others have an "error" on their line)
  2  the call is wrong
  3  the input is not readable as mzML
`;

const STRING = { type: 'string', multiple: true } as const;
const DEFINITIONS = {
  'precursor-mz': STRING,
  adduct: STRING,
  formula: STRING,
  elements: STRING,
  'tolerance-ppm': STRING,
  'tolerance-mda': STRING,
  top: STRING,
  'merge-energies': { type: 'boolean' },
  help: { type: 'boolean', short: 'h' }
} as const;

type Name = Exclude<keyof typeof DEFINITIONS, 'help' | 'merge-energies'>;
type Switches = { help?: boolean; 'merge-energies'?: boolean };
type Values = Partial<Record<Name, string[]>>;

function single(values: Values, name: Name): string | undefined {
  const given = values[name];
  if (given && given.length > 1) throw new CallError(`--${name} is given ${given.length} times`);
  return given?.[0];
}

function positiveNumber(values: Values, name: Name, unit: string): number | undefined {
  const text = single(values, name);
  if (text === undefined) return undefined;
  const value = Number(text);
  if (text.trim() === '' || !Number.isFinite(value) || value <= 0) {
    throw new CallError(`--${name} needs a number above 0 (${unit}), not "${text}"`);
  }
  return value;
}

function topCount(values: Values): number {
  const text = single(values, 'top');
  if (text === undefined) return 10;
  const value = Number(text);
  if (!Number.isInteger(value) || value < 1 || value > 1000) {
    throw new CallError(`--top needs a whole number from 1 to 1000, not "${text}"`);
  }
  return value;
}

function tolerance(values: Values): Tolerance | null {
  const ppm = positiveNumber(values, 'tolerance-ppm', 'ppm');
  const mda = positiveNumber(values, 'tolerance-mda', 'mDa');
  return ppm === undefined && mda === undefined ? null : { ppm: ppm ?? 0, mda: mda ?? 0 };
}

/** Runs a parser of the core over an option, so that a mistake is found before any file is read. */
function checked<T>(name: Name, text: string | undefined, parse: (text: string) => T): T | undefined {
  if (text === undefined) return undefined;
  try {
    return parse(text);
  } catch (error) {
    if (!(error instanceof CoreError)) throw error;
    throw new CallError(`--${name}: ${error.message}${error.cure ? ` ${error.cure}` : ''}`);
  }
}

/**
 * Reads the arguments after the script's name.
 * @throws CallError with one line that says what is wrong
 */
export function readCall(args: readonly string[]): Call {
  let parsed: { values: Values & Switches; positionals: string[] };
  try {
    parsed = parseArgs({ args: joinValues(args), options: DEFINITIONS, allowPositionals: true });
  } catch (error) {
    throw new CallError(error instanceof Error ? error.message.split(/\.?\s*\n|\. To /)[0] : String(error));
  }
  const { values, positionals } = parsed;
  const help = values.help ?? false;
  if (!help && positionals.length === 0) throw new CallError('No file is given; --help explains the call');
  const defaults = defaultSuggestOptions();
  const adduct = single(values, 'adduct');
  const formula = single(values, 'formula');
  checked('adduct', adduct, parseAdduct);
  checked('formula', formula, parseFormula);
  const elements = checked('elements', single(values, 'elements'), parseElementRanges);
  return {
    help,
    paths: positionals,
    options: {
      precursorMz: positiveNumber(values, 'precursor-mz', 'm/z') ?? null,
      mergeEnergies: values['merge-energies'] ?? false,
      suggest: {
        ...defaults,
        adducts: adduct === undefined ? [] : [adduct],
        formula: formula ?? null,
        elements: elements ?? defaults.elements,
        tolerance: tolerance(values),
        top: topCount(values)
      }
    }
  };
}

/** "--adduct [M-H]-" and "--top -1" mean their values, whatever these begin with. */
function joinValues(args: readonly string[]): string[] {
  const joined: string[] = [];
  for (let i = 0; i < args.length; i++) {
    const name = args[i].startsWith('--') ? args[i].slice(2) : '';
    if (args[i] === '--') return [...joined, ...args.slice(i)];
    const takesValue =
      Object.hasOwn(DEFINITIONS, name) && DEFINITIONS[name as keyof typeof DEFINITIONS].type === 'string';
    if (takesValue && i + 1 < args.length) joined.push(`${args[i]}=${args[++i]}`);
    else joined.push(args[i]);
  }
  return joined;
}
