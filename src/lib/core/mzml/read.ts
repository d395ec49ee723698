/** The reader: a stream of bytes to a stream of scans, with memory bounded by one spectrum. */
import { CoreError } from '../errors';
import type { AnalyserKind, RunInfo, RunWarning, Scan } from '../model';
import { Cutter, type CutEnd, type SpectrumPiece } from './cutter';
import { readHead, type FileHead } from './head';
import { readSettings, type ReadOptions, type ReadSettings } from './options';
import { uncompressed } from './source';
import { readSpectrum } from './spectrum';
import { WarningCollector } from './warnings';
import { byteText } from './window-text';

/** Facts known before the first scan. */
export type RunStart = Pick<RunInfo, 'ionSource' | 'analysers' | 'instrument' | 'startTime'> & { version: string };

export interface RunSummary {
  info: RunInfo;
  warnings: RunWarning[];
  /** the file ends before its XML does. */
  truncated: boolean;
  /** scans handed out. */
  scanCount: number;
  /** bytes of uncompressed mzML. */
  bytes: number;
  checksum: 'ok' | 'mismatch' | 'absent' | 'not-checked';
}

export type MzmlEvent =
  | { kind: 'run'; run: RunStart }
  | { kind: 'scan'; scan: Scan; byte: number; length: number }
  | { kind: 'end'; summary: RunSummary };

/** Bytes looked at together: so many fit into the cache of a processor, and little memory is held. */
const PORTION = 64 << 10;

class RunReader {
  readonly warnings = new WarningCollector();
  private head: FileHead | null = null;
  private run: RunStart | null = null;
  private readonly levels: Record<string, number> = {};
  private readonly analysers = new Set<AnalyserKind>();
  private polarity: RunInfo['polarity'] = null;
  private seen = 0;
  private firstFailure: CoreError | null = null;
  private stop: CoreError | null = null;
  private failures = 0;
  scanCount = 0;

  constructor(private readonly settings: ReadSettings) {}

  start(xml: string): RunStart {
    const head = readHead(xml);
    this.head = head;
    if (head.version === '') this.warnings.add('no-version', 'The file states no mzML version; it was read as 1.1');
    else if (!head.version.startsWith('1.1')) {
      this.warnings.add('old-version', `The file says mzML ${head.version.slice(0, 20)}; it was read as 1.1`);
    }
    const used = head.configurations.get(head.defaultConfiguration ?? '') ?? [...head.configurations.values()][0];
    this.run = {
      version: head.version,
      ionSource: used?.source ?? 'unknown',
      analysers: [...new Set([...head.configurations.values()].map((item) => item.analyser))],
      instrument: used?.model ?? null,
      startTime: head.startTime
    };
    return this.run;
  }

  /** Reads one spectrum; null when it was passed over or could not be used. */
  scan(piece: SpectrumPiece): Scan | null {
    if (!this.head)
      throw new CoreError('xml', 'A spectrum comes before the head of the file', { byte: piece.byte, scan: null });
    try {
      const scan = readSpectrum(
        { content: piece.content, binaries: piece.binaries, index: this.seen++ },
        this.head,
        this.settings,
        this.warnings
      );
      if ('skipped' in scan) return this.skip(scan.id, scan.level);
      this.count(scan);
      return scan;
    } catch (error) {
      if (!(error instanceof CoreError) || error.code === 'doctype') throw error;
      this.fail(new CoreError(error.code, error.message, { byte: piece.byte, scan: error.place.scan }, error.cure));
      return null;
    }
  }

  fail(error: CoreError): void {
    this.firstFailure ??= error;
    if (++this.failures > this.settings.limits.failures) {
      throw new CoreError('limit', `More than ${this.settings.limits.failures} spectra cannot be read`, error.place);
    }
    const where = error.place.byte === null ? '' : ` (first at byte ${error.place.byte})`;
    this.warnings.add(
      error.code,
      `Spectra that could not be read were left out: ${error.message}${where}`,
      error.place.scan
    );
  }

  /** The bytes end with this error; what came before is used. */
  stopAt(error: CoreError): void {
    this.stop = error;
  }

  private skip(id: string, level: number | null): null {
    if (level !== null) this.levels[level] = (this.levels[level] ?? 0) + 1;
    this.warnings.add(
      'not-mass-spectra',
      'Spectra that are no mass spectra (light absorption, for example) were passed over',
      id
    );
    return null;
  }

  private count(scan: Scan): void {
    this.scanCount++;
    this.levels[scan.level] = (this.levels[scan.level] ?? 0) + 1;
    this.analysers.add(scan.analyser);
    if (scan.polarity === null) this.warnings.add('no-polarity', 'The scan states no polarity', scan.id);
    else this.polarity = this.polarity === null || this.polarity === scan.polarity ? scan.polarity : 'mixed';
    if (scan.centroidedHere) this.warnings.add('centroided', 'Profile spectra were centroided here', scan.id);
  }

  finish(end: CutEnd): RunSummary {
    const { run } = this;
    if (!run) throw this.stop ?? endsEarly(end);
    if (this.stop) {
      this.warnings.add('damaged-gzip', `${this.stop.message}: only what comes before the damage was read`);
    }
    if (this.scanCount === 0) throw this.nothingRead(end);
    if (!end.closed) this.warnTruncated(end);
    if (end.wrongOffsets > 0) this.warnWrongIndex(end);
    const checksum = this.checksum(end);
    return {
      info: {
        polarity: this.polarity,
        ionSource: run.ionSource,
        analysers: [...this.analysers].sort(),
        instrument: run.instrument,
        startTime: run.startTime,
        scans: { ...this.levels }
      },
      warnings: this.warnings.list,
      truncated: !end.closed,
      scanCount: this.scanCount,
      bytes: end.bytes,
      checksum
    };
  }

  private warnWrongIndex({ wrongOffsets, statedOffsets }: CutEnd): void {
    this.warnings.add(
      'wrong-index',
      `The index at the end of the file leads to no spectrum for ${wrongOffsets} of its ${statedOffsets} entries: the file was changed after it was written. The index was not used and no scan is lost`
    );
  }

  private warnTruncated(end: CutEnd): void {
    const lost = end.mzmlClosed
      ? 'only the index at its end is cut, no scan is lost'
      : `the ${this.scanCount} complete scans before that were read, anything after is lost`;
    this.warnings.add('truncated', `The file ends too early, at byte ${end.bytes}: ${lost}`);
  }

  private nothingRead(end: CutEnd): CoreError {
    const failure = this.firstFailure ?? this.stop;
    if (failure) return failure;
    if (!end.closed) return endsEarly(end);
    const skipped = this.warnings.list.some((warning) => warning.code === 'not-mass-spectra');
    const what = skipped
      ? 'only spectra that are no mass spectra'
      : end.chromatograms > 0
        ? 'chromatograms but no spectra'
        : 'no spectra';
    return new CoreError(
      'no-spectra',
      `The file holds ${what}`,
      { byte: null, scan: null },
      'Convert the original data again without leaving out the spectra.'
    );
  }

  private checksum(end: CutEnd): RunSummary['checksum'] {
    if (!end.declaredChecksum || !/^[0-9a-f]{40}$/.test(end.declaredChecksum)) return 'absent';
    if (end.computedChecksum === null) return 'not-checked';
    if (end.computedChecksum === end.declaredChecksum) return 'ok';
    this.warnings.add(
      'checksum',
      'The SHA-1 checksum in the file does not fit its bytes: it was changed after it was written. It was read all the same'
    );
    return 'mismatch';
  }
}

function endsEarly(end: CutEnd): CoreError {
  return new CoreError(
    'truncated',
    `The file ends too early, at byte ${end.bytes}, before its first complete spectrum`,
    { byte: end.bytes, scan: null },
    'Copy or convert the file again.'
  );
}

function cancelled(): CoreError {
  return new CoreError('cancelled', 'Reading was cancelled');
}

/**
 * Reads an mzML 1.1 file, plain or gzipped (told apart by their first bytes), from a stream of bytes.
 * First comes a `run` event, then a `scan` event for each mass spectrum in the order of the file, then one `end` event.
 * A spectrum that cannot be used is left out with a warning; a truncated file gives its complete spectra.
 * Byte offsets count uncompressed bytes.
 * @throws CoreError `empty`, `not-mzml`, `unsupported-version`, `doctype`, `truncated` (nothing complete), `no-spectra`,
 *   `limit`, `inflate-limit`, `xml`, `cancelled`; or the first spectrum's error when none could be used.
 */
export async function* readMzml(
  source: AsyncIterable<Uint8Array>,
  options: ReadOptions = {}
): AsyncGenerator<MzmlEvent> {
  const settings = readSettings(options);
  const reader = new RunReader(settings);
  const textOf = options.quick === false ? null : (options.byteText ?? byteText);
  const cutter = new Cutter(settings.limits, options.sha1?.() ?? null, textOf);
  let taken = 0;
  const counted = (bytes: number) => {
    taken += bytes;
  };
  for await (const bytes of untilDamaged(uncompressed(source, options, settings.limits, counted), reader)) {
    if (options.isCancelled?.()) throw cancelled();
    for (let at = 0; at < bytes.length; at += PORTION) {
      cutter.push(bytes.subarray(at, at + PORTION));
      yield* piecesRead(cutter, reader);
    }
    options.onProgress?.(taken, reader.scanCount);
  }
  cutter.end();
  yield* piecesRead(cutter, reader);
  yield { kind: 'end', summary: reader.finish(cutter.finish()) };
}

/** The bytes up to where the gzip stream is damaged: the scans before that can be used. */
async function* untilDamaged(stream: AsyncIterable<Uint8Array>, reader: RunReader): AsyncGenerator<Uint8Array> {
  try {
    yield* stream;
  } catch (error) {
    if (!(error instanceof CoreError) || error.code !== 'truncated') throw error;
    reader.stopAt(error);
  }
}

/** Reads what can be cut from the bytes at hand. */
function* piecesRead(cutter: Cutter, reader: RunReader): Generator<MzmlEvent> {
  for (let piece = cutter.next(); piece; piece = cutter.next()) {
    if (piece.kind === 'head') {
      yield { kind: 'run', run: reader.start(piece.xml) };
    } else if (piece.kind === 'broken') {
      reader.fail(new CoreError('xml', 'A spectrum has no end', { byte: piece.byte, scan: null }));
    } else {
      const scan = reader.scan(piece);
      if (scan) yield { kind: 'scan', scan, byte: piece.byte, length: piece.length };
    }
  }
}

/** Reads a whole file into memory; for files of moderate size. Errors as for `readMzml`. */
export async function readRun(
  source: AsyncIterable<Uint8Array>,
  options: ReadOptions = {}
): Promise<{ scans: Scan[]; summary: RunSummary }> {
  const scans: Scan[] = [];
  for await (const event of readMzml(source, options)) {
    if (event.kind === 'scan') scans.push(event.scan);
    if (event.kind === 'end') return { scans, summary: event.summary };
  }
  throw new CoreError('truncated', 'The reader ended without a summary');
}
