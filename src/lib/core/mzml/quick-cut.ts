/** Cuts and scans the spectra of the common form. */
import type { ByteWindow } from './byte-window';
import type { ByteText } from './options';
import { quickRecord } from './quick-scan';
import type { BinaryText, SpectrumRecord } from './record';
import { Templates } from './template';
import { WindowText } from './window-text';

const END = '</spectrum>';
const BINARY = '<binary>';
const BINARY_END = '</binary>';
/** Larger spectra are cut by their markup, which never looks at a byte twice; their XML is a small part of them. */
const LARGEST = 2 << 20;

export interface QuickSpectrum {
  record: SpectrumRecord;
  binaries: BinaryText[];
  /** absolute: behind the spectrum. */
  end: number;
}

export class QuickCutter {
  private readonly view: WindowText;
  private readonly templates = new Templates();
  /** the number of bytes from which it makes sense to look for the end of the present spectrum once more. */
  private enough = 0;
  /** absolute: the end of a spectrum was looked for up to here. */
  lookedUntil = 0;

  constructor(textOf: ByteText) {
    this.view = new WindowText(textOf);
  }

  /** Call at the beginning of each spectrum. */
  begin(): void {
    this.enough = 0;
  }

  /** Call when the window gets more bytes. */
  moved(): void {
    this.view.clear();
  }

  /**
   * Cuts the spectrum that begins at `start` (absolute).
   * @param last no more bytes will come
   */
  cut(window: ByteWindow, start: number, last: boolean): QuickSpectrum | 'more' | 'unusual' {
    const held = window.end - start;
    if (held < this.enough && !last) return 'more';
    const { view } = this;
    view.cover(window, start);
    const at = start - view.from;
    const known = this.templates.match(view.text, at);
    if (known) return { record: known.record, ...this.place(window, known.binaries, known.end) };
    const end = view.text.indexOf(END, at);
    this.lookedUntil = end < 0 ? window.end : view.from + end;
    if (end < 0) {
      this.enough = Math.min(held * 1.5, LARGEST + 1);
      return last || held > LARGEST ? 'unusual' : 'more';
    }
    const ranges = findBinaries(view.text, at, end);
    const record = ranges && quickRecord(view.text, at, ranges);
    if (!record) return 'unusual';
    const behind = end + END.length;
    this.templates.learn(view.text, at, behind, ranges);
    return { record, ...this.place(window, ranges, behind) };
  }

  /** From indexes into the text to bytes and an absolute end. */
  private place(window: ByteWindow, ranges: readonly number[], end: number): Pick<QuickSpectrum, 'binaries' | 'end'> {
    const { from, text } = this.view;
    const binaries: BinaryText[] = [];
    for (let i = 0; i < ranges.length; i += 2) {
      const [begin, behind] = [ranges[i], ranges[i + 1]];
      binaries.push({ bytes: window.slice(from + begin, from + behind), text: text.slice(begin, behind) });
    }
    return { binaries, end: from + end };
  }
}

/** Begin and end of each base64 text as indexes into `text`, alternating; null when one is not plainly there. */
function findBinaries(text: string, from: number, to: number): number[] | null {
  const ranges: number[] = [];
  let at = text.indexOf(BINARY, from);
  while (at >= 0 && at < to) {
    const begin = at + BINARY.length;
    const end = text.indexOf('<', begin);
    if (!text.startsWith(BINARY_END, end)) return null;
    ranges.push(begin, end);
    at = text.indexOf(BINARY, end);
  }
  return ranges;
}
