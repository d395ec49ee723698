/** Cuts a stream of bytes into the head of the file and its spectra, without reading more than the tags. */
import { CoreError } from '../errors';
import { ByteWindow } from './byte-window';
import { declaredDecoder } from './declared-encoding';
import { IndexCheck } from './index-check';
import type { ByteText, ReadLimits, StreamingHash } from './options';
import type { BinaryText, SpectrumRecord } from './record';
import { QuickCutter } from './quick-cut';
import { named, nextMarkup, type Markup } from './tags';
import { byteText } from './window-text';

export interface HeadPiece {
  kind: 'head';
  xml: string;
}

export interface SpectrumPiece {
  kind: 'spectrum';
  /** absolute offset and length in the (uncompressed) stream. */
  byte: number;
  length: number;
  /** the spectrum's XML without the text of its `binary` elements; the record taken from it where the form is common. */
  content: string | SpectrumRecord;
  /** base64 text of each `binary` element in order; valid until the next `push`. */
  binaries: BinaryText[];
}

/** A spectrum whose end tag is missing although the file goes on. */
export interface BrokenPiece {
  kind: 'broken';
  byte: number;
}

export type Piece = HeadPiece | SpectrumPiece | BrokenPiece;

/** What is known when the stream has ended. */
export interface CutEnd {
  /** the root element was closed. */
  closed: boolean;
  /** the mzML element was closed, so that no spectrum can be missing. */
  mzmlClosed: boolean;
  /** offset of a spectrum that was begun but not ended. */
  openSpectrum: number | null;
  chromatograms: number;
  declaredChecksum: string | null;
  computedChecksum: string | null;
  /** offsets of spectra in the index, and how many of them lead to no spectrum. */
  statedOffsets: number;
  wrongOffsets: number;
  bytes: number;
}

const is = {
  mzml: named('mzML'),
  indexed: named('indexedmzML'),
  spectrum: named('spectrum'),
  spectrumList: named('spectrumList'),
  chromatogram: named('chromatogram'),
  chromatogramList: named('chromatogramList'),
  run: named('run'),
  binary: named('binary'),
  index: named('index'),
  offset: named('offset'),
  checksum: named('fileChecksum')
};

/** How much longer an incomplete tag must have become to be looked at again, so that no byte is looked at too often. */
const MORE = 1.5;
/** Elements of the common form nest so deep below a spectrum. */
const QUICK_DEPTH = 8;
/** Bytes of a checksum or an offset with white space. */
const LONGEST_AWAITED = 1000;
/** indexedmzML, mzML, run and spectrumList. */
const DEPTH_OF_SPECTRA = 4;
const COLON = 58;

type State = 'root' | 'head' | 'body' | 'spectrum';

export class Cutter {
  private readonly window = new ByteWindow();
  private state: State = 'root';
  private scan = 0;
  private start = 0;
  private depth = 0;
  private hashed = 0;
  private hash: StreamingHash | null;
  private decoder = new TextDecoder('utf-8');
  /** alternating: begin and end of each binary text, absolute. */
  private ranges: number[] = [];
  private openBinary = -1;
  private readonly quick: QuickCutter;
  private readonly common: boolean;
  /** the present spectrum may be of the common form. */
  private isQuick = false;
  /** absolute: spectra that begin before are left to the XML parser. */
  private quickFrom = 0;
  private ended = false;
  /** absolute: a tag that is not complete is looked at again once the bytes reach up to here. */
  private enough = 0;
  private plainRoot = false;
  /** absolute: begin of a short text, up to the next markup, and who wants it; null when there is none. */
  private awaited: { from: number; take: (text: string) => void } | null = null;
  private readonly indexCheck = new IndexCheck();
  private readonly result: CutEnd = {
    closed: false,
    mzmlClosed: false,
    openSpectrum: null,
    chromatograms: 0,
    declaredChecksum: null,
    computedChecksum: null,
    statedOffsets: 0,
    wrongOffsets: 0,
    bytes: 0
  };

  constructor(
    private readonly limits: ReadLimits,
    hash: StreamingHash | null,
    /** null: every spectrum goes through the XML parser. */
    textOf: ByteText | null
  ) {
    this.hash = hash;
    this.common = textOf !== null;
    this.quick = new QuickCutter(textOf ?? byteText);
  }

  /** Takes the next bytes of the stream; call `next` until it returns null before pushing again. */
  push(piece: Uint8Array): void {
    this.hashTo(this.scan);
    const begun = this.state === 'body' ? this.scan : this.start;
    const keep = Math.min(begun, this.awaited?.from ?? begun);
    this.window.push(piece, Math.min(this.scan, keep));
    this.quick.moved();
  }

  /**
   * Goes to the spectrum at an absolute offset; the bytes pushed next begin there. Call once the head has been handed out.
   */
  jump(byte: number): void {
    this.window.restart(byte);
    this.quick.moved();
    this.state = 'body';
    this.scan = this.start = byte;
    this.enough = 0;
    this.quickFrom = 0;
    this.depth = DEPTH_OF_SPECTRA;
    this.isQuick = false;
    this.ended = false;
    this.awaited = null;
    this.hash = null;
  }

  /** Call when no more bytes come, then `next` until it returns null, then `finish`. */
  end(): void {
    this.ended = true;
  }

  /**
   * The next complete piece, or null when more bytes are needed.
   * @throws CoreError `not-mzml`, `doctype` or `limit`.
   */
  next(): Piece | null {
    for (;;) {
      if (this.isQuick) {
        const piece = this.quickly();
        if (piece !== 'unusual') return piece;
      }
      const { bytes, base } = this.window;
      if (this.window.end < this.enough && !this.ended) return null;
      const found = nextMarkup(bytes, this.scan - base);
      if (typeof found === 'number') {
        this.scan = base + found;
        this.enough = this.scan + (bytes.length - found) * MORE;
        this.checkSize();
        this.checkTag();
        return null;
      }
      if (this.awaited) this.takeAwaited(base + found.start);
      this.scan = base + found.end;
      const piece = found.kind === 'other' ? null : this.take(bytes, found);
      if (piece) return piece;
    }
  }

  /** Call once at the very end. */
  finish(): CutEnd {
    if (this.state === 'root') throw this.notMzml();
    if (this.state === 'spectrum') this.result.openSpectrum = this.start;
    this.result.bytes = this.window.end;
    this.result.statedOffsets = this.indexCheck.stated;
    this.result.wrongOffsets = this.indexCheck.wrong;
    return this.result;
  }

  /** Of the encoding that the file declares; known once the head has been handed out. */
  get textDecoder(): TextDecoder {
    return this.decoder;
  }

  /** True while the head has not been handed out. */
  get inHead(): boolean {
    return this.state === 'root' || this.state === 'head';
  }

  private take(bytes: Uint8Array, tag: Markup): Piece | null {
    if (tag.kind === 'start' && ++this.depth > this.limits.depth) {
      throw new CoreError('limit', `Elements are nested more than ${this.limits.depth} deep`, this.place(tag.start));
    }
    if (tag.kind === 'end') this.depth--;
    if (this.state === 'spectrum') return this.inSpectrum(bytes, tag);
    if (this.state === 'body') return this.inBody(bytes, tag);
    return this.beforeBody(bytes, tag);
  }

  private beforeBody(bytes: Uint8Array, tag: Markup): Piece | null {
    if (this.state === 'root') {
      this.plainRoot = is.mzml(bytes, tag);
      if (tag.kind === 'end' || (!this.plainRoot && !is.indexed(bytes, tag))) throw this.notMzml(bytes, tag);
      this.decoder = declaredDecoder(bytes.subarray(0, tag.start));
      this.state = 'head';
      return null;
    }
    const ends = tag.kind === 'end' && (is.run(bytes, tag) || is.mzml(bytes, tag));
    const begins = is.spectrumList(bytes, tag) || is.spectrum(bytes, tag) || is.chromatogramList(bytes, tag);
    if (!ends && !begins) return null;
    const xml = this.decoder.decode(bytes.subarray(0, tag.start));
    this.state = 'body';
    // The tag that ends the head is looked at again as part of the body.
    this.scan = this.window.base + tag.start;
    this.depth -= tag.kind === 'start' ? 1 : tag.kind === 'end' ? -1 : 0;
    return { kind: 'head', xml };
  }

  private inBody(bytes: Uint8Array, tag: Markup): Piece | null {
    if (tag.kind === 'end') {
      if (is.mzml(bytes, tag)) this.result.mzmlClosed = true;
      if (is.indexed(bytes, tag) || (this.plainRoot && is.mzml(bytes, tag))) this.result.closed = true;
    } else if (is.spectrum(bytes, tag)) {
      this.beginSpectrum(tag);
      if (tag.kind === 'empty') return this.endSpectrum(tag);
    } else if (is.chromatogram(bytes, tag)) {
      this.result.chromatograms++;
    } else if (is.checksum(bytes, tag) && tag.kind === 'start') {
      const end = this.window.base + tag.end;
      this.hashTo(end);
      this.result.computedChecksum = this.hash?.hex() ?? null;
      this.hash = null;
      this.await(end, (text) => {
        this.result.declaredChecksum = text.trim().slice(0, 64).toLowerCase();
      });
    } else if (is.index(bytes, tag)) {
      this.indexCheck.index(this.decoder.decode(bytes.subarray(tag.start, tag.end)));
    } else if (is.offset(bytes, tag) && tag.kind === 'start') {
      this.await(this.window.base + tag.end, (text) => this.indexCheck.offset(text));
    }
    return null;
  }

  private beginSpectrum(tag: Markup): void {
    this.state = 'spectrum';
    this.start = this.window.base + tag.start;
    this.indexCheck.spectrum(this.start);
    this.ranges = [];
    this.openBinary = -1;
    const prefixed = this.window.bytes[tag.nameFrom - 1] === COLON;
    const isShallow = this.depth + QUICK_DEPTH <= this.limits.depth;
    this.isQuick = this.common && tag.kind === 'start' && !prefixed && isShallow && this.start >= this.quickFrom;
    this.quick.begin();
  }

  /** Cuts a spectrum of the common form; null when more bytes are needed. */
  private quickly(): SpectrumPiece | null | 'unusual' {
    const { start, window } = this;
    const cut = this.quick.cut(window, start, this.ended);
    if (cut === 'more') this.checkSize();
    if (cut === 'more') return null;
    this.isQuick = false;
    if (cut === 'unusual') return cut;
    this.state = 'body';
    this.depth--;
    this.scan = cut.end;
    return { kind: 'spectrum', byte: start, length: cut.end - start, content: cut.record, binaries: cut.binaries };
  }

  private inSpectrum(bytes: Uint8Array, tag: Markup): Piece | null {
    const { base } = this.window;
    if (tag.kind === 'end') {
      if (is.spectrum(bytes, tag)) return this.endSpectrum(tag);
      if (is.binary(bytes, tag) && this.openBinary >= 0) {
        this.ranges.push(this.openBinary, base + tag.start);
        this.openBinary = -1;
      }
      if (is.spectrumList(bytes, tag) || is.run(bytes, tag)) return this.breakOff(tag);
    } else if (is.binary(bytes, tag)) {
      if (tag.kind === 'empty') this.ranges.push(base + tag.end, base + tag.end);
      else this.openBinary = base + tag.end;
    } else if (is.spectrum(bytes, tag)) {
      return this.breakOff(tag);
    }
    return null;
  }

  /** The spectrum never ended: give it up and look at the tag again from outside. */
  private breakOff(tag: Markup): Piece {
    const byte = this.start;
    this.state = 'body';
    // Nothing is looked through twice for the end of a spectrum, however many are begun and never ended.
    this.quickFrom = this.quick.lookedUntil;
    this.scan = this.window.base + tag.start;
    this.depth = Math.min(this.depth, DEPTH_OF_SPECTRA);
    return { kind: 'broken', byte };
  }

  private endSpectrum(tag: Markup): SpectrumPiece {
    this.state = 'body';
    const { window, ranges, start } = this;
    const end = window.base + tag.end;
    let xml = '';
    let from = start;
    const binaries: BinaryText[] = [];
    for (let i = 0; i < ranges.length; i += 2) {
      xml += this.decoder.decode(window.slice(from, ranges[i]));
      binaries.push({ bytes: window.slice(ranges[i], ranges[i + 1]), text: null });
      from = ranges[i + 1];
    }
    xml += this.decoder.decode(window.slice(from, end));
    if (xml.length > this.limits.spectrumXmlBytes) {
      throw new CoreError('limit', `The XML of one spectrum is larger than ${this.limits.spectrumXmlBytes} bytes`, {
        byte: start,
        scan: null
      });
    }
    return { kind: 'spectrum', byte: start, length: end - start, content: xml, binaries };
  }

  private checkSize(): void {
    const held = this.window.end - this.start;
    if (this.inHead && held > this.limits.headBytes) {
      throw new CoreError('limit', `More than ${this.limits.headBytes} bytes come before the first spectrum`, {
        byte: 0,
        scan: null
      });
    }
    if (this.state === 'spectrum' && held > this.limits.spectrumBytes) {
      throw new CoreError('limit', `One spectrum is larger than ${this.limits.spectrumBytes} bytes`, {
        byte: this.start,
        scan: null
      });
    }
  }

  /** Bounds a tag, comment or the like that is not complete. */
  private checkTag(): void {
    const waiting = this.window.end - this.scan;
    if (waiting > this.limits.spectrumXmlBytes) {
      throw new CoreError('limit', `One tag is longer than ${this.limits.spectrumXmlBytes} bytes`, this.place(0));
    }
  }

  private await(from: number, take: (text: string) => void): void {
    this.awaited = { from, take };
  }

  private takeAwaited(end: number): void {
    const { awaited } = this;
    this.awaited = null;
    awaited?.take(this.decoder.decode(this.window.slice(awaited.from, Math.min(end, awaited.from + LONGEST_AWAITED))));
  }

  private hashTo(end: number): void {
    if (this.hash && end > this.hashed) {
      this.hash.update(this.window.slice(this.hashed, end));
      this.hashed = end;
    }
  }

  private place(index: number): { byte: number; scan: null } {
    return { byte: this.window.base + index, scan: null };
  }

  private notMzml(bytes?: Uint8Array, tag?: Markup): CoreError {
    const name =
      bytes && tag
        ? new TextDecoder().decode(bytes.subarray(tag.nameFrom, Math.min(tag.nameTo, tag.nameFrom + 40)))
        : '';
    const what = name ? `Its root element is "${name}"` : 'It holds no XML element';
    return new CoreError(
      'not-mzml',
      `The file is not mzML. ${what}`,
      { byte: tag?.start ?? 0, scan: null },
      'Convert the original data to mzML 1.1 and use that file.'
    );
  }
}
