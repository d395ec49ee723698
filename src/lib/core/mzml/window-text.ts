/** The bytes of a window as text with one letter for each byte, so that offsets fit: search in text is much faster. */
import type { ByteWindow } from './byte-window';
import type { ByteText } from './options';

/** Stands for a byte that is no ASCII; nothing that is read in the common form holds it. */
const MASK = 1;
const LAST_ASCII = 127;

const decoder = new TextDecoder('utf-8');

/** ASCII as it is, any other byte as some letter that is none of ASCII's printable ones. */
export const byteText: ByteText = (bytes) => {
  const text = decoder.decode(bytes);
  // One letter for each byte, none of them a stand-in for what is no UTF-8: all is ASCII.
  if (text.length === bytes.length && !text.includes('\ufffd')) return text;
  return decoder.decode(bytes.map((byte) => (byte > LAST_ASCII ? MASK : byte)));
};

export class WindowText {
  text = '';
  /** absolute offset of the first letter. */
  from = 0;
  private to = -1;

  constructor(private readonly textOf: ByteText) {}

  /** Makes `text` hold the window from `start` (absolute), or from before it, to its end. */
  cover(window: ByteWindow, start: number): void {
    if (this.to === window.end && this.from <= start) return;
    this.from = start;
    this.to = window.end;
    this.text = this.textOf(window.slice(start, window.end));
  }

  /** Lets go of the text, once the window has moved on. */
  clear(): void {
    this.text = '';
    this.to = -1;
  }
}
