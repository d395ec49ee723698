/** Base64 of RFC 4648, section 4, decoded from bytes; white space inside is passed over, everything else is an error. */
import { CoreError } from '../errors';

const SPACE = 64;
const PAD = 65;
const BAD = 66;

const CODES = (() => {
  const table = new Uint8Array(256).fill(BAD);
  const alphabet = 'ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/';
  for (let i = 0; i < 64; i++) table[alphabet.charCodeAt(i)] = i;
  for (const space of [9, 10, 13, 32]) table[space] = SPACE;
  table[61] = PAD;
  return table;
})();

/**
 * Decodes `text[start, end)`.
 * @throws CoreError `bad-base64` for a foreign character, data after padding, or a length that cannot be.
 */
export function decodeBase64(text: Uint8Array, start = 0, end = text.length): Uint8Array {
  const out = new Uint8Array((((end - start) * 3) >> 2) + 3);
  let i = start;
  let n = 0;
  // Whole quartets without white space or padding: the common case.
  while (i + 4 <= end) {
    const a = CODES[text[i]];
    const b = CODES[text[i + 1]];
    const c = CODES[text[i + 2]];
    const d = CODES[text[i + 3]];
    if ((a | b | c | d) >= SPACE) break;
    const word = (a << 18) | (b << 12) | (c << 6) | d;
    out[n++] = word >> 16;
    out[n++] = (word >> 8) & 255;
    out[n++] = word & 255;
    i += 4;
  }
  return decodeRest(text, i, end, out, n);
}

function decodeRest(text: Uint8Array, start: number, end: number, out: Uint8Array, filled: number): Uint8Array {
  let n = filled;
  let word = 0;
  let digits = 0;
  let padding = 0;
  for (let i = start; i < end; i++) {
    const code = CODES[text[i]];
    if (code === SPACE) continue;
    if (code === BAD)
      throw new CoreError('bad-base64', `Base64 text holds the byte ${text[i]}, which is no base64 character`);
    if (code === PAD) {
      padding++;
      continue;
    }
    if (padding > 0) throw new CoreError('bad-base64', 'Base64 text goes on after its padding');
    word = (word << 6) | code;
    if (++digits === 4) {
      out[n++] = (word >> 16) & 255;
      out[n++] = (word >> 8) & 255;
      out[n++] = word & 255;
      word = 0;
      digits = 0;
    }
  }
  if (digits === 1 || padding > 2 || (padding > 0 && digits + padding !== 4)) {
    throw new CoreError('bad-base64', 'Base64 text is cut off or wrongly padded');
  }
  if (digits >= 2) out[n++] = (word >> (digits === 2 ? 4 : 10)) & 255;
  if (digits === 3) out[n++] = (word >> 2) & 255;
  return out.subarray(0, n);
}

const ALPHABET = Uint8Array.from('ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/', (c) =>
  c.charCodeAt(0)
);

/** Encodes bytes; the result is ASCII text as bytes. */
export function encodeBase64(bytes: Uint8Array): Uint8Array {
  const out = new Uint8Array(Math.ceil(bytes.length / 3) * 4).fill(61);
  let n = 0;
  for (let i = 0; i < bytes.length; i += 3) {
    const left = Math.min(3, bytes.length - i);
    const word = (bytes[i] << 16) | ((bytes[i + 1] ?? 0) << 8) | (bytes[i + 2] ?? 0);
    for (let k = 0; k <= left; k++) out[n + k] = ALPHABET[(word >> (18 - 6 * k)) & 63];
    n += 4;
  }
  return out;
}
