/** Ways to damage an mzML file, all drawn from a seeded source. */
import { deflateSync, gzipSync, inflateSync } from 'node:zlib';
import type { Random } from './random';

/** Damages bytes; `other` is a second file to take pieces from. Returns new bytes. */
export type Mutation = (bytes: Buffer, random: Random, other: Buffer) => Buffer;

const NUMBERS = [
  ...['0', '-1', '-0', '1e309', '-1e309', 'NaN', 'INF', '-INF', '1.#QNAN', '', ' ', '1,5', '0x10', '1e-320', '.', '+'],
  ...['2147483648', '4294967296', '9007199254740993', '99999999999999999999999', '1.7976931348623157e308']
];
const TEXTS = [
  ...NUMBERS,
  ...['constructor', '__proto__', 'toString', '&lt;', '&amp', '&nope;', '&#0;', '&#x110000;', '&#xD800;', '&&', "'"],
  ...[
    '../../etc/passwd',
    '<script>',
    '\u0000',
    '\n',
    '\t x \t',
    'é',
    '\ufffd',
    '"',
    '>',
    'x'.repeat(5000),
    'MS:1000511'
  ]
];
const MARKUP = [
  ...[
    '<!-- -->',
    '<!-- <spectrum> -->',
    '<![CDATA[<]]>',
    '<![CDATA[',
    '<!--',
    '<?x y?>',
    '<?',
    '<!',
    '</',
    '<',
    '>',
    '/>'
  ],
  ...['<!DOCTYPE mzML [<!ENTITY a "b">]>', '<spectrum>', '</spectrum>', '<binary>', '</binary>', '<binary/>', '</run>'],
  ...['<a>'.repeat(100), '<cvParam/>', '<userParam name="a" value="b"/>', '<mz:spectrum>', '</indexedmzML>', '&amp;'],
  ...['<scan/>', '<precursor/>', '<selectedIon/>', '<referenceableParamGroupRef ref="x"/>', '<fileChecksum>']
];

function replaced(bytes: Buffer, from: number, to: number, by: string | Buffer): Buffer {
  return Buffer.concat([bytes.subarray(0, from), typeof by === 'string' ? Buffer.from(by) : by, bytes.subarray(to)]);
}

/** A stretch of at most `longest` bytes. */
function stretch(bytes: Buffer, random: Random, longest: number): [from: number, to: number] {
  const from = random.below(bytes.length + 1);
  return [from, Math.min(bytes.length, from + 1 + random.below(longest))];
}

/** The next place of `text` behind a random one, or the first of all; -1 when it is nowhere. */
function someplace(bytes: Buffer, random: Random, text: string): number {
  const at = bytes.indexOf(text, random.below(bytes.length + 1));
  return at < 0 ? bytes.indexOf(text) : at;
}

const flipBits: Mutation = (bytes, random) => {
  const out = Buffer.from(bytes);
  for (let n = 1 + random.below(8); n > 0 && out.length > 0; n--) out[random.below(out.length)] ^= 1 << random.below(8);
  return out;
};

const remove: Mutation = (bytes, random) => replaced(bytes, ...stretch(bytes, random, random.pick([1, 20, 2000])), '');

const repeat: Mutation = (bytes, random) => {
  const [from, to] = stretch(bytes, random, random.pick([1, 50, 3000]));
  return replaced(bytes, to, to, bytes.subarray(from, to));
};

const truncate: Mutation = (bytes, random) => bytes.subarray(0, random.below(bytes.length + 1));

const splice: Mutation = (bytes, random, other) =>
  replaced(bytes, ...stretch(bytes, random, 3000), other.subarray(...stretch(other, random, 3000)));

/** The value of some attribute: [from, to) without its quotes; null when there is none. */
function someAttribute(bytes: Buffer, random: Random): [from: number, to: number] | null {
  const at = someplace(bytes, random, '="');
  const to = at < 0 ? -1 : bytes.indexOf('"', at + 2);
  return to < 0 ? null : [at + 2, to];
}

const editAttribute: Mutation = (bytes, random) => {
  const value = someAttribute(bytes, random);
  if (!value) return bytes;
  const [from, to] = value;
  const nameFrom = bytes.lastIndexOf(' ', from) + 1;
  const whole = bytes.subarray(nameFrom, to + 1);
  const text = bytes.subarray(from, to).toString('latin1');
  return random.pick([
    () => replaced(bytes, from, to, random.pick(TEXTS)),
    () => replaced(bytes, nameFrom, to + 1, ''),
    () => replaced(bytes, to + 1, to + 1, Buffer.concat([Buffer.from(' '), whole])),
    () => replaced(bytes, from - 1, to + 1, `'${text}'`),
    () => replaced(bytes, from - 2, from - 1, ' = '),
    () => replaced(bytes, nameFrom, from - 2, random.pick(['value', 'name', 'x', 'id', 'accession', 'p:value'])),
    () => replaced(bytes, from, to, ` ${text} `)
  ])();
};

const editNumber: Mutation = (bytes, random) => {
  let from = random.below(bytes.length + 1);
  const isDigit = (at: number) => bytes[at] >= 48 && bytes[at] <= 57;
  while (from < bytes.length && !isDigit(from)) from++;
  let to = from;
  while (isDigit(to) || bytes[to] === 46) to++;
  return replaced(bytes, from, to, random.pick(NUMBERS));
};

const insertMarkup: Mutation = (bytes, random) => {
  const tag = someplace(bytes, random, '<');
  const at = tag < 0 || random.below(4) === 0 ? random.below(bytes.length + 1) : tag;
  return replaced(bytes, at, at, random.pick(MARKUP));
};

/** Removes, doubles or renames a whole tag. */
const editTag: Mutation = (bytes, random) => {
  const from = someplace(bytes, random, '<');
  const to = from < 0 ? -1 : bytes.indexOf('>', from) + 1;
  if (to <= 0) return bytes;
  const tag = bytes.subarray(from, to).toString('latin1');
  return replaced(
    bytes,
    from,
    to,
    random.pick([() => '', () => tag + tag, () => tag.toUpperCase(), () => `${tag}\r\n `])()
  );
};

/** Some base64 text: [from, to); null when there is none. */
function someArray(bytes: Buffer, random: Random): [from: number, to: number] | null {
  const at = someplace(bytes, random, '<binary>');
  const to = at < 0 ? -1 : bytes.indexOf('<', at + 8);
  return to < 0 ? null : [at + 8, to];
}

const damageBase64: Mutation = (bytes, random) => {
  const array = someArray(bytes, random);
  if (!array) return bytes;
  const at = array[0] + random.below(array[1] - array[0] + 1);
  const foreign = random.pick(['=', '==', '-', '_', '!', '\n', ' ', 'A', 'é', '\u0000', '']);
  return replaced(bytes, at, Math.min(array[1], at + random.below(5)), foreign);
};

const inflated = (packed: Buffer): Buffer | null => {
  try {
    return inflateSync(packed, { maxOutputLength: 1 << 24 });
  } catch {
    // Not compressed with zlib: the bytes themselves are damaged then.
    return null;
  }
};

/** Damages the bytes behind the base64 text, or puts far too many in their place. */
const damageArray: Mutation = (bytes, random) => {
  const array = someArray(bytes, random);
  if (!array) return bytes;
  const packed = Buffer.from(bytes.subarray(...array).toString('latin1'), 'base64');
  const raw = inflated(packed);
  const made = random.pick([
    () => flipBits(packed, random, packed),
    () => truncate(packed, random, packed),
    () => deflateSync(Buffer.alloc(random.pick([1, 7, 1 << 12, 1 << 22]))),
    () => deflateSync(flipBits(raw ?? packed, random, packed)),
    () => Buffer.concat([packed, packed]),
    () => Buffer.alloc(random.below(64), random.below(256))
  ])();
  return replaced(bytes, ...array, made.toString('base64'));
};

const damageGzip: Mutation = (bytes, random) => {
  const middle = random.below(bytes.length + 1);
  const zipped = Buffer.concat([gzipSync(bytes.subarray(0, middle)), gzipSync(bytes.subarray(middle))]);
  return random.pick([flipBits, truncate, remove, repeat, (same: Buffer) => same])(zipped, random, zipped);
};

/** All ways but gzip, which hides the file from the others. */
export const MUTATIONS: readonly Mutation[] = [
  ...[flipBits, remove, repeat, truncate, splice, editAttribute, editNumber, insertMarkup, editTag],
  ...[damageBase64, damageArray, editAttribute, editAttribute, damageArray]
];

/** Damages a file once to three times, and one in twelve as gzip besides. */
export function mutated(bytes: Buffer, random: Random, other: Buffer): Buffer {
  let out = bytes;
  for (let n = 1 + random.below(3); n > 0; n--) out = random.pick(MUTATIONS)(out, random, other);
  return random.below(12) === 0 ? damageGzip(out, random, other) : out;
}
