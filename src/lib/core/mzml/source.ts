/** From the bytes as stored to plain, ASCII-compatible mzML: gzip and UTF-16 are undone, other things refused. */
import { CoreError } from '../errors';
import { gunzipWithPako } from './inflate';
import type { ReadLimits, ReadOptions } from './options';

type Bytes = AsyncIterable<Uint8Array>;

const SNIFFED = 64;
const RATIO_JUDGED_FROM = 10 * 2 ** 20;

/** Takes pieces until there are `SNIFFED` bytes, then gives these first bytes and the whole stream again. */
async function peek(source: Bytes): Promise<{ first: Uint8Array; stream: Bytes }> {
  const iterator = source[Symbol.asyncIterator]();
  const held: Uint8Array[] = [];
  let length = 0;
  while (length < SNIFFED) {
    const step = await iterator.next();
    if (step.done) break;
    held.push(step.value);
    length += step.value.length;
  }
  const first = new Uint8Array(length);
  let at = 0;
  for (const piece of held) {
    first.set(piece, at);
    at += piece.length;
  }
  async function* again(): AsyncGenerator<Uint8Array> {
    try {
      if (first.length > 0) yield first;
      for (let step = await iterator.next(); !step.done; step = await iterator.next()) yield step.value;
    } finally {
      await iterator.return?.();
    }
  }
  return { first, stream: again() };
}

/** Stops a gzip bomb: bounds the inflated size, and its ratio to what was read so far. */
async function* bounded(stream: Bytes, limits: ReadLimits, taken: () => number): AsyncGenerator<Uint8Array> {
  let out = 0;
  for await (const piece of stream) {
    out += piece.length;
    if (out > limits.gzipBytes || (out > RATIO_JUDGED_FROM && out > taken() * limits.gzipRatio)) {
      throw new CoreError(
        'inflate-limit',
        `The gzip file inflates to more than ${out} bytes from ${taken()}; that is no plausible mzML, so reading was stopped`,
        { byte: out, scan: null }
      );
    }
    yield piece;
  }
}

async function* fromUtf16(stream: Bytes, label: string): AsyncGenerator<Uint8Array> {
  const decoder = new TextDecoder(label);
  const encoder = new TextEncoder();
  for await (const piece of stream) yield encoder.encode(decoder.decode(piece, { stream: true }));
  yield encoder.encode(decoder.decode());
}

function utf16Label(first: Uint8Array): string | null {
  if (first[0] === 0xff && first[1] === 0xfe) return 'utf-16le';
  if (first[0] === 0xfe && first[1] === 0xff) return 'utf-16be';
  if (first[0] === 0x3c && first[1] === 0) return 'utf-16le';
  return first[0] === 0 && first[1] === 0x3c ? 'utf-16be' : null;
}

const SIGNATURES: readonly [string, readonly number[]][] = [
  ['a ZIP archive', [0x50, 0x4b, 3, 4]],
  ['an HDF5 file', [0x89, 0x48, 0x44, 0x46]],
  ['a PDF file', [0x25, 0x50, 0x44, 0x46]],
  ['a bzip2 archive', [0x42, 0x5a, 0x68]],
  ['an xz archive', [0xfd, 0x37, 0x7a, 0x58]],
  ['a zstd archive', [0x28, 0xb5, 0x2f, 0xfd]]
];

function checkFirst(first: Uint8Array): void {
  if (first.length === 0) throw new CoreError('empty', 'The file is empty', { byte: 0, scan: null });
  const bom = first[0] === 0xef && first[1] === 0xbb && first[2] === 0xbf ? 3 : 0;
  const letter = first.subarray(bom).find((byte) => byte > 32);
  if (letter === 0x3c || (letter === undefined && first.length - bom >= 1)) return;
  const kind = SIGNATURES.find(([, magic]) => magic.every((byte, i) => first[i] === byte));
  throw new CoreError(
    'not-mzml',
    `The file is not mzML: ${kind ? `it is ${kind[0]}` : 'it does not begin with XML'}`,
    { byte: 0, scan: null },
    'Convert the original data to mzML 1.1 and use that file.'
  );
}

/**
 * The plain bytes of a stored file.
 * @param counted told of each piece of the stored bytes
 * @throws CoreError `empty`, `not-mzml` or `inflate-limit`
 */
export async function* uncompressed(
  source: Bytes,
  options: ReadOptions,
  limits: ReadLimits,
  counted: (bytes: number) => void
): AsyncGenerator<Uint8Array> {
  let taken = 0;
  async function* counting(): AsyncGenerator<Uint8Array> {
    for await (const piece of source) {
      taken += piece.length;
      counted(piece.length);
      yield piece;
    }
  }
  let { first, stream } = await peek(counting());
  if (first[0] === 0x1f && first[1] === 0x8b) {
    const inflated = (options.gunzip ?? gunzipWithPako)(stream);
    ({ first, stream } = await peek(bounded(inflated, limits, () => taken)));
  }
  const wide = utf16Label(first);
  if (wide) stream = fromUtf16(stream, wide);
  else checkFirst(first);
  yield* stream;
}
