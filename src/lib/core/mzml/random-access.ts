/** Single scans of a large file, without reading the rest. */
import { CoreError } from '../errors';
import type { RunWarning, Scan } from '../model';
import { Cutter, type Piece, type SpectrumPiece } from './cutter';
import { detached } from './detached';
import { readHead, type FileHead } from './head';
import { readIndexList } from './index-list';
import { readSettings, type ReadOptions, type ReadSettings } from './options';
import { readSpectrum } from './spectrum';
import { WarningCollector } from './warnings';
import { byteText } from './window-text';
import { attribute, parseXml } from './xml';

/** Bytes that can be read from any place. */
export interface RandomAccessSource {
  /** bytes. */
  size: number;
  /** The `length` bytes from `offset` on; both are within the source. */
  read(offset: number, length: number): Promise<Uint8Array>;
}

/** Where a spectrum begins. */
export interface ScanEntry {
  /** native id. */
  id: string;
  /** offset of its `<`. */
  byte: number;
}

/** `file`: the index written in the file; `rebuilt`: made by reading the whole file once. */
export type IndexOrigin = 'file' | 'rebuilt';

type RandomAccessOptions = Pick<
  ReadOptions,
  'base64' | 'byteText' | 'inflate' | 'centroid' | 'quick' | 'limits' | 'isCancelled'
>;

/** Bytes read at once to find one spectrum. */
const STEP = 64 << 10;
/** Bytes read at once when the whole file is. */
const LARGE_STEP = 1 << 20;
const LESS_THAN = 60;
/** So many entries of an index are tried before it is believed; each one is tried again when its scan is opened. */
const TRIED = 8;

function refuseContainers(first: Uint8Array): void {
  const gzip = first[0] === 0x1f && first[1] === 0x8b;
  const wide = first.subarray(0, 4).includes(0) || first[0] >= 0xfe;
  if (!gzip && !wide) return;
  throw new CoreError(
    gzip ? 'unsupported-compression' : 'xml',
    `Single scans cannot be opened in a ${gzip ? 'gzip file' : 'file in UTF-16'}`,
    { byte: 0, scan: null },
    gzip ? 'Inflate the file first.' : 'Store the file in UTF-8 first.'
  );
}

/** A file whose scans can be opened one by one. */
export class RandomAccessRun {
  private list: readonly ScanEntry[] = [];
  private positions: ReadonlyMap<string, number> = new Map();
  private from: IndexOrigin = 'file';
  private readonly collector = new WarningCollector();

  private constructor(
    private readonly source: RandomAccessSource,
    private readonly cutter: Cutter,
    private readonly head: FileHead,
    private readonly settings: ReadSettings,
    private readonly isCancelled: () => boolean
  ) {}

  /**
   * Reads the head and the index of a file. An index that is missing or wrong is made anew from the whole file.
   * @throws CoreError `not-mzml`, `unsupported-version`, `xml`, `doctype`, `limit`, `truncated`, `cancelled`;
   *   `unsupported-compression` for a gzip file
   */
  static async open(source: RandomAccessSource, options: RandomAccessOptions = {}): Promise<RandomAccessRun> {
    const settings = readSettings(options);
    const textOf = options.quick === false ? null : (options.byteText ?? byteText);
    const cutter = new Cutter(settings.limits, null, textOf);
    if (source.size === 0) throw new CoreError('empty', 'The file is empty', { byte: 0, scan: null });
    refuseContainers(await source.read(0, Math.min(64, source.size)));
    const head = await firstPiece(source, cutter, 0);
    if (head?.kind !== 'head') {
      throw new CoreError('truncated', 'The file ends before its first spectrum', { byte: source.size, scan: null });
    }
    const run = new RandomAccessRun(source, cutter, readHead(head.xml), settings, options.isCancelled ?? (() => false));
    await run.takeIndex();
    return run;
  }

  /** All spectra in the order of the file, those that are no mass spectra among them. */
  get entries(): readonly ScanEntry[] {
    return this.list;
  }

  get origin(): IndexOrigin {
    return this.from;
  }

  get warnings(): RunWarning[] {
    return this.collector.list;
  }

  /**
   * Opens one scan. Where the index turns out wrong, it is made anew once and kept.
   * @param id native id
   * @throws CoreError `no-spectra` when there is no mass spectrum of that id; else as for a spectrum in `readMzml`
   */
  async scan(id: string): Promise<Scan> {
    const position = this.positions.get(id);
    const scan = position === undefined ? null : await this.tryOpen(position);
    if (scan) return scan;
    if (this.from === 'rebuilt') throw this.noScan(id);
    await this.rebuild(`the index does not lead to the scan "${id.slice(0, 100)}"`);
    return this.scan(id);
  }

  private noScan(id: string): CoreError {
    return new CoreError('no-spectra', `The file holds no mass spectrum with the id "${id.slice(0, 100)}"`, {
      byte: null,
      scan: id
    });
  }

  /** The scan at a position of the index; null when something else stands there. */
  private async tryOpen(position: number): Promise<Scan | null> {
    const { id, byte } = this.list[position];
    const piece = await this.cut(byte);
    if (!piece || idOf(piece, position) !== id) return null;
    const input = { content: piece.content, binaries: piece.binaries, index: position };
    const scan = readSpectrum(input, this.head, this.settings, this.collector);
    if ('skipped' in scan) throw this.noScan(id);
    return scan;
  }

  /** The spectrum that begins at `byte`; null when none does. */
  private async cut(byte: number): Promise<SpectrumPiece | null> {
    this.cutter.jump(byte);
    const start = await this.source.read(byte, Math.min(2, this.source.size - byte));
    if (start[0] !== LESS_THAN) return null;
    const piece = await firstPiece(this.source, this.cutter, byte);
    return piece?.kind === 'spectrum' && piece.byte === byte ? piece : null;
  }

  private async takeIndex(): Promise<void> {
    const entries = await readIndexList(this.source, this.cutter.textDecoder);
    if (!entries) return this.rebuild('it holds no usable index of its spectra');
    const step = Math.max(1, (entries.length - 1) / (TRIED - 1));
    for (let i = 0; i < entries.length; i += step) {
      const position = Math.floor(i);
      const piece = await this.cut(entries[position].byte);
      if (!piece || idOf(piece, position) !== entries[position].id) {
        return this.rebuild('its index points to wrong places');
      }
    }
    this.take(entries);
  }

  /** Of several spectra with one id, the first is the one that is opened. */
  private take(entries: readonly ScanEntry[]): void {
    this.list = entries;
    this.positions = new Map(entries.map((entry, i) => [entry.id, i] as const).reverse());
  }

  /** Reads the whole file once for the places of its spectra. */
  private async rebuild(why: string): Promise<void> {
    const { source, cutter } = this;
    const entries: ScanEntry[] = [];
    const take = () => {
      for (let piece = cutter.next(); piece; piece = cutter.next()) {
        if (piece.kind === 'spectrum') entries.push({ id: idOf(piece, entries.length), byte: piece.byte });
      }
    };
    cutter.jump(0);
    for (let at = 0; at < source.size; at += LARGE_STEP) {
      if (this.isCancelled()) throw new CoreError('cancelled', 'Reading was cancelled');
      cutter.push(await source.read(at, Math.min(LARGE_STEP, source.size - at)));
      take();
    }
    cutter.end();
    take();
    this.take(entries);
    this.from = 'rebuilt';
    this.collector.add('index', `The whole file was read once to find its spectra, because ${why}`);
  }
}

/** Native id as `readMzml` gives it. */
function idOf({ content }: SpectrumPiece, position: number): string {
  const written = typeof content === 'string' ? attribute(parseXml(content).element, 'id') : content.id;
  return detached((written ?? `index=${position}`).slice(0, 1000));
}

/** Pushes bytes from `from` on until something is cut; null at the end of the source. */
async function firstPiece(source: RandomAccessSource, cutter: Cutter, from: number): Promise<Piece | null> {
  let step = STEP;
  for (let at = from; at < source.size; at += step, step = Math.min(step * 2, LARGE_STEP)) {
    const length = Math.min(step, source.size - at);
    cutter.push(await source.read(at, length));
    const piece = cutter.next();
    if (piece) return piece;
  }
  cutter.end();
  return cutter.next();
}
