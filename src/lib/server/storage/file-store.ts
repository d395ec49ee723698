import type { Readable } from 'node:stream';

/** Inclusive byte range of an object. */
export interface ByteRange {
  start: number;
  /** last byte; absent: to the end. */
  end?: number;
}

/** Keeps whole files under keys of our own making. An object is either complete under its key or absent. */
export interface FileStore {
  /** Stores a stream. @param bytes its exact length; another length is refused and nothing is kept */
  put(key: string, source: Readable, bytes: number): Promise<void>;
  /** Takes over a local file, which is gone afterwards. */
  adopt(key: string, path: string): Promise<void>;
  /** Reads an object or a range of it. @throws MissingFile */
  open(key: string, range?: ByteRange): Promise<Readable>;
  /** Bytes of an object, null when there is none. */
  size(key: string): Promise<number | null>;
  /** Removes an object; an absent one is no error. */
  delete(key: string): Promise<void>;
}

/** The object is not (or no longer) in the store. */
export class MissingFile extends Error {
  constructor(readonly key: string) {
    super('The file is missing from the store.');
    this.name = 'MissingFile';
  }
}

const KEY = /^[a-z0-9][a-z0-9-]*(\/[a-z0-9][a-z0-9-]*)*$/;

/**
 * Keys are lower-case words, digits, hyphens and slashes, so that none can leave the store or name a hidden file.
 * What a client calls a file never becomes part of a key.
 * @throws RangeError
 */
export function checkKey(key: string): string {
  if (key.length > 180 || !KEY.test(key)) throw new RangeError('A storage key holds a character that is not allowed.');
  return key;
}
