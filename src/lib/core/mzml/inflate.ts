/** zlib and gzip (RFC 1950, 1952) on pako, with bounds on what comes out. */
import {
  Z_BUF_ERROR,
  Z_NO_FLUSH,
  Z_OK,
  Z_STREAM_END,
  ZStream,
  zlibInflate,
  zlibInflateEnd,
  zlibInflateInit2,
  zlibInflateReset
} from 'pako';
import { CoreError } from '../errors';

const ZLIB_WINDOW = 15;
const GZIP_WINDOW = 31;
const PIECE = 256 * 1024;

/**
 * Inflates one zlib stream.
 * @throws CoreError `bad-array` for damaged data, `inflate-limit` when more than `maxLength` bytes come out.
 */
export function inflateWithPako(bytes: Uint8Array, expectedLength: number, maxLength: number): Uint8Array {
  const stream = new ZStream();
  zlibInflateInit2(stream, ZLIB_WINDOW);
  stream.input = bytes;
  stream.avail_in = bytes.length;
  let out = new Uint8Array(Math.max(16, Math.min(expectedLength, maxLength)) + 16);
  for (;;) {
    stream.output = out;
    stream.avail_out = out.length - stream.next_out;
    const status = zlibInflate(stream, Z_NO_FLUSH);
    if (stream.next_out > maxLength) {
      throw new CoreError(
        'inflate-limit',
        `An array inflates to more than the ${maxLength} bytes its declared length allows`
      );
    }
    if (status === Z_STREAM_END) break;
    if (status !== Z_OK && status !== Z_BUF_ERROR) throw new CoreError('bad-array', 'zlib data are damaged');
    if (stream.avail_out > 0) throw new CoreError('bad-array', 'zlib data end too early');
    const larger = new Uint8Array(Math.min(out.length * 2, maxLength + 16));
    larger.set(out);
    out = larger;
  }
  const length = stream.next_out;
  zlibInflateEnd(stream);
  return out.subarray(0, length);
}

/** A member ended; begins the next one where another gzip header follows, else passes over the trailing bytes. */
function nextMember(stream: ZStream): boolean {
  while (stream.avail_in > 0 && stream.input[stream.next_in] === 0) {
    stream.next_in++;
    stream.avail_in--;
  }
  zlibInflateReset(stream);
  return stream.avail_in > 0;
}

/** Inflates a gzip file of one or several members piece by piece. Truncated input simply ends. */
export async function* gunzipWithPako(source: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  const stream = new ZStream();
  zlibInflateInit2(stream, GZIP_WINDOW);
  for await (const piece of source) {
    stream.input = piece;
    stream.next_in = 0;
    stream.avail_in = piece.length;
    while (stream.avail_in > 0) {
      stream.output = new Uint8Array(PIECE);
      stream.next_out = 0;
      stream.avail_out = PIECE;
      const status = zlibInflate(stream, Z_NO_FLUSH);
      if (stream.next_out > 0) yield stream.output.subarray(0, stream.next_out);
      if (status === Z_STREAM_END) {
        if (!nextMember(stream)) break;
      } else if (status !== Z_OK && status !== Z_BUF_ERROR) {
        throw new CoreError(
          'truncated',
          'The gzip stream is damaged',
          undefined,
          'Compress the file again or upload it uncompressed.'
        );
      }
    }
  }
  zlibInflateEnd(stream);
}
