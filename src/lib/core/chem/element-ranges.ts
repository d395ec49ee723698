import { CoreError } from '../errors';
import { type ElementRanges } from '../model';
import { elementOf } from './elements';

const MAX_COUNT = 999;

const badElements = (text: string, what: string) =>
  new CoreError(
    'bad-elements',
    `The element ranges "${text.length > 80 ? text.slice(0, 80) + '…' : text}" cannot be read: ${what}.`,
    undefined,
    'Write each element with its range, e.g. C0-60H0-120N0-10O0-20S0-2; a single number is the maximum.'
  );

/**
 * Reads element ranges such as "C0-60H0-120N0-10O0-20". "S2" means 0 to 2, "S" means 0 to 1. Spaces and commas
 * between elements are allowed.
 * @throws CoreError bad-elements for unknown symbols, repeated elements, or a minimum above its maximum.
 */
export function parseElementRanges(text: string): ElementRanges {
  const source = text.trim();
  if (source === '') throw badElements(text, 'nothing is written');
  const token = /([A-Z][a-z]?)(\d+)?(?:\s*[-–]\s*(\d+))?[\s,;]*/y;
  const ranges: Record<string, readonly [number, number]> = {};
  let position = 0;
  while (position < source.length) {
    token.lastIndex = position;
    const match = token.exec(source);
    if (!match) throw badElements(text, `"${source[position]}" at character ${position + 1} is not expected`);
    const [whole, symbol, first, second] = match;
    if (!elementOf(symbol)) throw badElements(text, `"${symbol}" at character ${position + 1} is not a known element`);
    if (ranges[symbol]) throw badElements(text, `${symbol} is given twice`);
    const low = second === undefined ? 0 : Number(first ?? 0);
    const high = Number(second ?? first ?? 1);
    if (low > high) throw badElements(text, `${symbol} starts at ${low} and ends at ${high}`);
    if (high > MAX_COUNT) throw badElements(text, `${symbol}${high} is more than ${MAX_COUNT} atoms`);
    ranges[symbol] = [low, high];
    position += whole.length;
  }
  return ranges;
}

/** The text form that `parseElementRanges` reads, in the order of the object's keys. */
export function formatElementRanges(ranges: ElementRanges): string {
  return Object.keys(ranges)
    .map((symbol) => `${symbol}${ranges[symbol][0]}-${ranges[symbol][1]}`)
    .join('');
}
