/** Files as streams of bytes. */
import type { Hash } from 'node:crypto';
import { createReadStream } from 'node:fs';

/** The bytes of a file, each piece passed through a hash of the file as stored. */
export async function* hashedFile(path: string, hash: Hash): AsyncGenerator<Uint8Array> {
  for await (const piece of createReadStream(path, { highWaterMark: 1 << 20 })) {
    const bytes = piece as Buffer;
    hash.update(bytes);
    yield bytes;
  }
}
