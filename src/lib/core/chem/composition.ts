import { CoreError } from '../errors';
import { type Composition } from '../model';
import { ELECTRON_MASS, elementMass, elementOf, valenceOf } from './elements';

const symbolOrder = (hasCarbon: boolean) => (a: string, b: string) => {
  const rank = (s: string) => (hasCarbon && s === 'C' ? 0 : hasCarbon && s === 'H' ? 1 : 2);
  return rank(a) - rank(b) || (a < b ? -1 : 1);
};

/**
 * Element counts as text in Hill order: C, H, then alphabetical; strictly alphabetical without carbon.
 * Zero counts are left out; an empty composition gives ''.
 */
export function formatFormula(composition: Composition): string {
  const symbols = Object.keys(composition).filter((symbol) => composition[symbol] !== 0);
  symbols.sort(symbolOrder(symbols.includes('C')));
  return symbols.map((s) => (composition[s] === 1 ? s : `${s}${composition[s]}`)).join('');
}

const badFormula = (text: string, position: number, what: string) =>
  new CoreError(
    'bad-formula',
    `The formula "${text}" cannot be read: ${what} at character ${position + 1}.`,
    undefined,
    'Write element symbols with counts, e.g. C8H10N4O2; brackets as in CH3(CH2)4OH are allowed.'
  );

/** Longest formula text that is read, in characters. */
const MAX_FORMULA_LENGTH = 200;
/** Largest count of one element that is read. */
const MAX_COUNT = 9999;

/**
 * Reads a molecular or ion formula without charge, e.g. "C8H10N4O2" or "CH3(CH2)4OH".
 * @throws CoreError bad-formula with the position of the first character that cannot be read.
 */
export function parseFormula(text: string): Composition {
  const source = text.trim();
  if (source === '') throw badFormula(text, 0, 'nothing is written');
  if (source.length > MAX_FORMULA_LENGTH) throw badFormula(source.slice(0, 20) + '…', MAX_FORMULA_LENGTH, 'too long');
  const token = /([A-Z][a-z]?)(\d*)|(\()|(\))(\d*)/y;
  const stack: Record<string, number>[] = [{}];
  let position = 0;
  while (position < source.length) {
    token.lastIndex = position;
    const match = token.exec(source);
    if (!match) throw badFormula(source, position, `"${source[position]}" is not expected`);
    const [whole, symbol, count, open, close, times] = match;
    if (symbol !== undefined) {
      if (!elementOf(symbol)) throw badFormula(source, position, `"${symbol}" is not a known element`);
      addInto(stack[stack.length - 1], { [symbol]: 1 }, readCount(source, position, count));
    } else if (open !== undefined) {
      stack.push({});
    } else if (close !== undefined) {
      const group = stack.pop();
      if (!group || stack.length === 0) throw badFormula(source, position, 'a bracket closes that was not opened');
      addInto(stack[stack.length - 1], group, readCount(source, position, times));
    }
    position += whole.length;
  }
  if (stack.length > 1) throw badFormula(source, source.length, 'a bracket is not closed');
  return withoutZeros(stack[0]);
}

function readCount(source: string, position: number, digits: string): number {
  const count = digits === '' ? 1 : Number(digits);
  if (count > MAX_COUNT) throw badFormula(source, position, `the count ${digits} is too large`);
  return count;
}

function addInto(target: Record<string, number>, other: Composition, times: number): void {
  for (const symbol of Object.keys(other)) target[symbol] = (target[symbol] ?? 0) + times * other[symbol];
}

function withoutZeros(counts: Composition): Composition {
  return Object.fromEntries(Object.entries(counts).filter(([, n]) => n !== 0));
}

/** Sum of two compositions, the second taken `times` times. */
export function add(a: Composition, b: Composition, times = 1): Composition {
  const sum: Record<string, number> = { ...a };
  addInto(sum, b, times);
  return withoutZeros(sum);
}

/** Difference a − b; counts may become negative, see `isSubset`. */
export function subtract(a: Composition, b: Composition): Composition {
  return add(a, b, -1);
}

/** True when every count of `part` is at most that of `whole` (equal compositions included). */
export function isSubset(part: Composition, whole: Composition): boolean {
  return Object.keys(part).every((symbol) => part[symbol] <= (whole[symbol] ?? 0));
}

/** Mass in u of a neutral composition, each element as its most abundant isotope. */
export function monoisotopicMass(composition: Composition): number {
  let mass = 0;
  for (const symbol of Object.keys(composition)) mass += composition[symbol] * elementMass(symbol);
  return mass;
}

/** Sum of the mass numbers of the most abundant isotopes. */
export function nominalMass(composition: Composition): number {
  let mass = 0;
  for (const symbol of Object.keys(composition)) mass += composition[symbol] * (elementOf(symbol)?.principal ?? NaN);
  return mass;
}

/**
 * m/z of an ion from the composition of all its nuclei and its signed charge number (not 0).
 * Electrons are counted: cations have lost, anions gained them.
 */
export function ionMz(composition: Composition, charge: number): number {
  return (monoisotopicMass(composition) - charge * ELECTRON_MASS) / Math.abs(charge);
}

/** Mass in u of all nuclei with their electrons for an ion of this m/z and signed charge: the inverse of `ionMz`. */
export function nucleiMass(mz: number, charge: number): number {
  return mz * Math.abs(charge) + charge * ELECTRON_MASS;
}

/**
 * Rings plus double bonds, 1 + Σ n(v − 2)/2 with the lowest valences (IUPAC 2013, ring-plus-double-bond).
 * Neutral closed-shell molecules give integers; ions (composition of all nuclei) give x.5 when even-electron.
 */
export function dbe(composition: Composition): number {
  let sum = 1;
  for (const symbol of Object.keys(composition)) sum += (composition[symbol] * (valenceOf(symbol) - 2)) / 2;
  return sum;
}

/**
 * True for an odd-electron (radical) ion, from the composition of all its nuclei and its charge number
 * (default 1; only its parity matters).
 */
export function isOddElectron(ionComposition: Composition, charge = 1): boolean {
  const whole = Number.isInteger(dbe(ionComposition));
  return charge % 2 === 0 ? !whole : whole;
}

/** Electron parity of a neutral composition: true for radicals (CH3, NO2, Cl …). */
export function isRadical(neutral: Composition): boolean {
  return !Number.isInteger(dbe(neutral));
}
