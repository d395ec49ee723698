/** What the reader takes from Node: files as streams, zlib, gzip and SHA-1. */
import { createHash, type Hash } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { Readable } from 'node:stream';
import { createGunzip, inflateSync } from 'node:zlib';
import { CoreError } from '../lib/core/errors';
import type { Inflate, StreamingHash } from '../lib/core/mzml';

/** zlib with the size known beforehand; errors become those of the core. */
export const inflate: Inflate = (bytes, expectedLength, maxLength) => {
  try {
    return inflateSync(bytes, { chunkSize: Math.max(64, expectedLength + 64), maxOutputLength: maxLength });
  } catch (error) {
    const code = error instanceof Error && 'code' in error ? error.code : '';
    if (code === 'ERR_BUFFER_TOO_LARGE') {
      throw new CoreError(
        'inflate-limit',
        `An array inflates to more than the ${maxLength} bytes its declared length allows`
      );
    }
    throw new CoreError('bad-array', code === 'Z_BUF_ERROR' ? 'zlib data end too early' : 'zlib data are damaged');
  }
};

/** gzip, all members; a cut end simply ends, other damage is an error. */
export async function* gunzip(source: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  const stream = Readable.from(source, { objectMode: false }).compose(createGunzip());
  try {
    for await (const piece of stream) yield piece as Uint8Array;
  } catch (error) {
    if (error instanceof Error && 'code' in error && error.code === 'Z_BUF_ERROR') return;
    if (error instanceof Error && 'code' in error && String(error.code).startsWith('Z_')) {
      throw new CoreError('truncated', 'The gzip stream is damaged', undefined, 'Compress the file again.');
    }
    throw error;
  }
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

/** The bytes of a file, each piece passed through a hash of the file as stored. */
export async function* hashedFile(path: string, hash: Hash): AsyncGenerator<Uint8Array> {
  for await (const piece of createReadStream(path, { highWaterMark: 1 << 20 })) {
    const bytes = piece as Buffer;
    hash.update(bytes);
    yield bytes;
  }
}
