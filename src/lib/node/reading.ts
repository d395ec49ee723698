/** What the reader of mzML takes from Node, on the server as on the command line: base64, zlib, gzip and SHA-1. */
import { createHash } from 'node:crypto';
import { createGunzip, inflateSync, type Gunzip } from 'node:zlib';
import { CoreError } from '../core/errors';
import type { ByteText, Inflate, QuickBase64, ReadOptions, StreamingHash } from '../core/mzml';

const codeOf = (error: unknown) => (error instanceof Error && 'code' in error ? String(error.code) : '');

/** zlib with the size known beforehand; errors become those of the core. */
export const inflate: Inflate = (bytes, expectedLength, maxLength) => {
  try {
    const chunkSize = Math.max(64, Math.min(expectedLength, maxLength) + 64);
    return inflateSync(bytes, { chunkSize, maxOutputLength: Math.max(1, maxLength) });
  } catch (error) {
    if (codeOf(error) === 'ERR_BUFFER_TOO_LARGE') {
      throw new CoreError(
        'inflate-limit',
        `An array inflates to more than the ${maxLength} bytes its declared length allows`
      );
    }
    throw new CoreError(
      'bad-array',
      codeOf(error) === 'Z_BUF_ERROR' ? 'zlib data end too early' : 'zlib data are damaged'
    );
  }
};

/** Bytes as ISO 8859-1. */
export const byteText: ByteText = (bytes) =>
  Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength).toString('latin1');

/** Taken for every array that fits: an allocation for each costs more than the decoding. */
const scratch = Buffer.allocUnsafeSlow(1 << 20);

/** Base64 by Node, which passes over foreign letters and takes "-" and "_": what holds any of these is declined. */
export const base64: QuickBase64 = (text) => {
  const { length } = text;
  if (length % 4 !== 0 || text.includes('-') || text.includes('_')) return null;
  const padding = text.endsWith('==') ? 2 : text.endsWith('=') ? 1 : 0;
  const size = (length / 4) * 3 - padding;
  if (size <= scratch.length) return scratch.write(text, 'base64') === size ? scratch.subarray(0, size) : null;
  const decoded = Buffer.from(text, 'base64');
  return decoded.length === size ? decoded : null;
};

/** So much is handed to gunzip at once; what comes out, at most a thousand times as much, is held until it is taken. */
const PORTION = 16 << 10;

/** Nothing more will come out: all members are read, or the stream has failed. */
const isOver = (stream: Gunzip) => stream.readableEnded || stream.destroyed;

/** Hands bytes to the stream, or ends it without any; resolves when they are inflated, or nothing more will come out. */
function feed(stream: Gunzip, bytes: Uint8Array | null): Promise<void> {
  const last = ['end', 'error', 'close'];
  return new Promise((resolve) => {
    const done = () => {
      for (const event of last) stream.off(event, done);
      resolve();
    };
    if (isOver(stream)) return resolve();
    for (const event of last) stream.on(event, done);
    if (bytes) stream.write(bytes, done);
    else stream.end();
  });
}

/**
 * gzip, all members. A cut end simply ends, so that the scans before it are kept; the source is read to its end all the
 * same.
 * @throws CoreError `truncated` for other damage, behind everything that came before it
 */
export async function* gunzip(source: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  // What a failing step has inflated is lost, so the steps are small.
  const stream = createGunzip({ chunkSize: 1 << 16 });
  const inflated: Uint8Array[] = [];
  let failure: unknown = null;
  stream.on('data', (piece: Uint8Array) => inflated.push(piece));
  stream.on('error', (error) => (failure = error));
  try {
    for await (const piece of source) {
      for (let at = 0; at < piece.length && !isOver(stream); at += PORTION) {
        await feed(stream, piece.subarray(at, at + PORTION));
        yield* inflated.splice(0);
      }
    }
    await feed(stream, null);
    yield* inflated.splice(0);
  } finally {
    stream.destroy();
  }
  if (!failure || codeOf(failure) === 'Z_BUF_ERROR') return;
  if (!codeOf(failure).startsWith('Z_')) throw failure;
  throw new CoreError(
    'truncated',
    'The gzip stream is damaged',
    undefined,
    'Compress the file again, or use it uncompressed.'
  );
}

/** A SHA-1 that the reader can feed. */
export function sha1(): StreamingHash {
  const hash = createHash('sha1');
  return {
    update: (bytes) => {
      hash.update(bytes);
    },
    hex: () => hash.digest('hex')
  };
}

/** All of these, as the reader takes them. */
export const nodeReading: Required<Pick<ReadOptions, 'base64' | 'byteText' | 'inflate' | 'gunzip' | 'sha1'>> = {
  base64,
  byteText,
  inflate,
  gunzip,
  sha1
};
