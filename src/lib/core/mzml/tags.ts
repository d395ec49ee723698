/** Finding XML markup in bytes (ASCII-compatible encodings), without regard to what it means. */
import { CoreError } from '../errors';

export type MarkupKind = 'start' | 'end' | 'empty' | 'other';

/** One piece of markup: positions are indexes into the bytes given. */
export interface Markup {
  kind: MarkupKind;
  /** of the `<`. */
  start: number;
  /** behind the `>`. */
  end: number;
  /** local name. */
  nameFrom: number;
  nameTo: number;
}

const LT = 60;
const GT = 62;
const SLASH = 47;
const BANG = 33;
const QUESTION = 63;
const COLON = 58;
const DOUBLE = 34;
const SINGLE = 39;

function ascii(text: string): Uint8Array {
  return Uint8Array.from(text, (letter) => letter.charCodeAt(0));
}

const COMMENT = ascii('<!--');
const CDATA = ascii('<![CDATA[');

/** True when `bytes` hold `text` at `at`. */
export function startsWith(bytes: Uint8Array, text: Uint8Array, at: number): boolean {
  for (let i = 0; i < text.length; i++) if (bytes[at + i] !== text[i]) return false;
  return true;
}

/** Index behind the sequence `a a GT` or `a GT`, or -1. */
function findClose(bytes: Uint8Array, from: number, letter: number, times: number): number {
  for (let gt = bytes.indexOf(GT, from + times); gt >= 0; gt = bytes.indexOf(GT, gt + 1)) {
    let same = true;
    for (let k = 1; k <= times; k++) same &&= bytes[gt - k] === letter;
    if (same) return gt + 1;
  }
  return -1;
}

/** Index of the `>` that ends the tag whose name starts at `from`; quoted attribute values may hold `>`. */
function findTagEnd(bytes: Uint8Array, from: number): number {
  for (let i = from; i < bytes.length; i++) {
    const byte = bytes[i];
    if (byte === GT) return i;
    if (byte === DOUBLE || byte === SINGLE) {
      i = bytes.indexOf(byte, i + 1);
      if (i < 0) return -1;
    }
  }
  return -1;
}

function readTag(bytes: Uint8Array, start: number): Markup | null {
  const closing = bytes[start + 1] === SLASH;
  let nameFrom = start + (closing ? 2 : 1);
  const gt = findTagEnd(bytes, nameFrom);
  if (gt < 0) return null;
  let nameTo = nameFrom;
  for (; nameTo < gt; nameTo++) {
    const byte = bytes[nameTo];
    if (byte <= 32 || byte === SLASH) break;
    if (byte === COLON) nameFrom = nameTo + 1;
  }
  const kind = closing ? 'end' : bytes[gt - 1] === SLASH ? 'empty' : 'start';
  return { kind, start, end: gt + 1, nameFrom, nameTo };
}

/**
 * Reads the markup at or after `from`.
 * @returns the markup; a number when more bytes are needed: the index from which to look again.
 * @throws CoreError `doctype` for any document type declaration.
 */
export function nextMarkup(bytes: Uint8Array, from: number): Markup | number {
  const start = bytes.indexOf(LT, from);
  if (start < 0) return bytes.length;
  const second = bytes[start + 1];
  if (second === undefined) return start;
  if (second !== BANG && second !== QUESTION) return readTag(bytes, start) ?? start;
  if (second === BANG && bytes.length - start < CDATA.length) return start;
  let end: number;
  if (second === QUESTION) end = findClose(bytes, start + 1, QUESTION, 1);
  else if (startsWith(bytes, COMMENT, start)) end = findClose(bytes, start + 3, 45, 2);
  else if (startsWith(bytes, CDATA, start)) end = findClose(bytes, start + 8, 93, 2);
  else throw new CoreError('doctype', 'The file holds a document type declaration; mzML has none, so it is refused');
  return end < 0 ? start : { kind: 'other', start, end, nameFrom: start, nameTo: start };
}

/** Makes a test for one local name. */
export function named(name: string): (bytes: Uint8Array, markup: Markup) => boolean {
  const letters = ascii(name);
  return (bytes, markup) =>
    markup.nameTo - markup.nameFrom === letters.length && startsWith(bytes, letters, markup.nameFrom);
}
