import { createHash } from 'node:crypto';
import { constants, gunzipSync } from 'node:zlib';
import { ServiceError } from '../errors';

const HEAD = 64 * 1024;
/** Beyond deflate's greatest ratio for anything but long repeats: no mzML reaches it. */
const INFLATED_HEAD = 1 << 26;
const CURE = 'Convert the original data to mzML 1.1 and upload that file.';

/** First bytes of the XML, inflated where the file is gzipped; what is left of a cut gzip stream is enough. */
function xmlHead(head: Buffer): Buffer {
  if (head[0] !== 0x1f || head[1] !== 0x8b) return head;
  try {
    return gunzipSync(head, { finishFlush: constants.Z_SYNC_FLUSH, maxOutputLength: INFLATED_HEAD }).subarray(0, HEAD);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ERR_BUFFER_TOO_LARGE')
      throw new ServiceError(
        'invalid',
        `The first 64 kB of the gzip file inflate to more than ${INFLATED_HEAD >> 20} MiB; no mzML does, so it is refused.`,
        CURE
      );
    throw new ServiceError('invalid', 'The file begins like gzip, but cannot be inflated.', 'Compress it again.');
  }
}

/** Text of the head; UTF-16 is told by its first two bytes. */
function headText(bytes: Buffer): string {
  const wide = (bytes[0] === 0xff && bytes[1] === 0xfe) || (bytes[0] === 0x3c && bytes[1] === 0);
  const swapped = (bytes[0] === 0xfe && bytes[1] === 0xff) || (bytes[0] === 0 && bytes[1] === 0x3c);
  if (wide) return bytes.toString('utf16le');
  if (swapped)
    return Buffer.from(bytes.subarray(0, bytes.length & ~1))
      .swap16()
      .toString('utf16le');
  return bytes.toString('latin1');
}

/**
 * Looks at the first 64 kB of a file: XML whose root is mzML (or its indexed form), plain or gzipped.
 * Everything else is left to the reader, which says where and what.
 * @throws ServiceError invalid
 */
export function checkHead(head: Buffer): void {
  if (!head.length) throw new ServiceError('invalid', 'The file is empty.', 'Export or copy it again.');
  const text = headText(xmlHead(head));
  const root =
    /^\uFEFF?(?:\u00ef\u00bb\u00bf)?\s*(?:<\?[^>]*\?>\s*|<!--[^]*?-->\s*|<![^>[]*(?:\[[^]*?\])?>\s*)*<([\w:.-]{1,100})/.exec(
      text
    );
  if (!root) throw new ServiceError('invalid', 'The file is not mzML: it does not begin with XML.', CURE);
  const name = root[1].split(':').at(-1);
  if (name !== 'mzML' && name !== 'indexedmzML')
    throw new ServiceError('invalid', 'The file is XML, but not mzML: its root element is another one.', CURE);
}

/**
 * Reads a file once: its head is checked before the rest is taken, then both hashes are made.
 * @returns SHA-1 and SHA-256 in hex
 * @throws ServiceError invalid
 */
export async function inspect(source: AsyncIterable<Buffer>): Promise<{ sha1: string; sha256: string }> {
  const sha1 = createHash('sha1');
  const sha256 = createHash('sha256');
  let head: Buffer | null = Buffer.alloc(0);
  for await (const piece of source) {
    if (head) {
      head = Buffer.concat([head, piece]);
      if (head.length >= HEAD) {
        checkHead(head);
        head = null;
      }
    }
    sha1.update(piece);
    sha256.update(piece);
    // One megabyte takes milliseconds; other people's requests go in between.
    await new Promise((resolve) => setImmediate(resolve));
  }
  if (head) checkHead(head);
  return { sha1: sha1.digest('hex'), sha256: sha256.digest('hex') };
}
