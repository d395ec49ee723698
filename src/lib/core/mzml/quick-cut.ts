/** Finds the end of a spectrum and its base64 texts by looking at nothing but the `<` and the names behind them. */
import type { ByteWindow } from './byte-window';
import { startsWith } from './tags';

const LT = 60;
const SLASH = 47;
const COLON = 58;
const ascii = (text: string): Uint8Array => Uint8Array.from(text, (letter) => letter.charCodeAt(0));
const END = ascii('</spectrum>');
const LIST_END = ascii('</spectrum');
const RUN_END = ascii('</run');
const SPECTRUM = ascii('<spectrum');
const BINARY = ascii('<binary>');
const BINARY_END = ascii('</binary>');

/** 'more': more bytes are needed; 'unusual': cut it by its markup instead. */
export type QuickCutResult = 'done' | 'more' | 'unusual';

function isLetter(byte: number): boolean {
  return (byte | 32) >= 97 && (byte | 32) <= 122;
}

export class QuickCut {
  /** absolute: behind the spectrum, once done. */
  end = 0;
  /** number of `<` outside the base64 texts. */
  count = 1;
  /** begin and end of each base64 text, absolute, alternating. */
  readonly ranges: number[] = [];
  private inBinary = false;

  /** @param at absolute offset behind the start tag of the spectrum */
  constructor(private at: number) {}

  /** Goes on from where it stopped. */
  run({ bytes, base }: ByteWindow): QuickCutResult {
    let i = this.at - base;
    for (;;) {
      if (this.inBinary) i = bytes.indexOf(LT, i);
      else while (i < bytes.length && bytes[i] !== LT) i++;
      if (i < 0 || i >= bytes.length) {
        this.at = base + bytes.length;
        return 'more';
      }
      const next = this.inBinary ? this.endBinary(bytes, base, i) : this.tag(bytes, base, i);
      if (typeof next === 'string') return next;
      i = next;
    }
  }

  private endBinary(bytes: Uint8Array, base: number, i: number): number | 'unusual' {
    if (!startsWith(bytes, BINARY_END, i)) return 'unusual';
    this.ranges.push(base + i);
    this.inBinary = false;
    this.count++;
    return i + BINARY_END.length;
  }

  private tag(bytes: Uint8Array, base: number, i: number): number | 'done' | 'unusual' {
    this.count++;
    const closing = bytes[i + 1] === SLASH;
    if (closing) {
      if (startsWith(bytes, END, i)) {
        this.end = base + i + END.length;
        return 'done';
      }
      if (startsWith(bytes, LIST_END, i) || startsWith(bytes, RUN_END, i)) return 'unusual';
      if (startsWith(bytes, BINARY_END, i)) return 'unusual';
    } else if (startsWith(bytes, BINARY, i)) {
      this.inBinary = true;
      this.ranges.push(base + i + BINARY.length);
      return i + BINARY.length;
    } else if (startsWith(bytes, SPECTRUM, i)) return 'unusual';
    return passName(bytes, i + (closing ? 2 : 1));
  }
}

/** Index behind a name. One with a prefix, one that the bytes at hand cut off, and no name at all are unusual. */
function passName(bytes: Uint8Array, from: number): number | 'unusual' {
  let k = from;
  while (k < bytes.length && isLetter(bytes[k])) k++;
  return k === from || k === bytes.length || bytes[k] === COLON ? 'unusual' : k;
}
