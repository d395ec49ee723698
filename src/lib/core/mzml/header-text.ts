/** The XML of a spectrum around its base64 texts, as one text decoded in one go. */
import type { ByteWindow } from './byte-window';
import type { QuickCut } from './quick-cut';

const NOT_ASCII = /[\u0080-\uffff]/;

export class HeaderText {
  private buffer = new Uint8Array(1 << 13);
  private readonly utf8 = new TextDecoder('utf-8');

  /** @param longest bytes of XML; more are left to the cutter that says what is wrong */
  constructor(private readonly longest: number) {}

  /**
   * @param start absolute offset of the spectrum
   * @param encoding of the file, as a TextDecoder names it
   * @returns null where it is too long, or where another encoding than UTF-8 leaves a doubt
   */
  read(window: ByteWindow, start: number, { ranges, end }: QuickCut, encoding: string): string | null {
    let length = 0;
    let from = start;
    for (let i = 0; i <= ranges.length; i += 2) {
      const part = window.slice(from, ranges[i] ?? end);
      if (length + part.length > this.longest) return null;
      this.reserve(length + part.length);
      this.buffer.set(part, length);
      length += part.length;
      from = ranges[i + 1];
    }
    const text = this.utf8.decode(this.buffer.subarray(0, length));
    return encoding === 'utf-8' || !NOT_ASCII.test(text) ? text : null;
  }

  private reserve(length: number): void {
    if (length <= this.buffer.length) return;
    const larger = new Uint8Array(2 * length);
    larger.set(this.buffer);
    this.buffer = larger;
  }
}
