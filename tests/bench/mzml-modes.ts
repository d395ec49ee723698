/** The ways of reading an mzML file that are compared: the least that any reader must do, ours, and a plain XML stream. */
import { closeSync, openSync, readSync } from 'node:fs';
import { open } from 'node:fs/promises';
import { inflateSync } from 'node:zlib';
import { SaxesParser } from 'saxes';
import { nodeReading } from '../../src/lib/node/reading';
import { RandomAccessRun, readMzml } from '../../src/lib/core/mzml';
import { median } from './goal';

export interface Counted {
  spectra: number;
  /** null where not all are read. */
  peaks: number | null;
  /** median wall time of opening one scan, ms. */
  each?: number;
}

/** So many scans are opened, this many apart. */
const OPENED = 300;
const STRIDE = 7919;

const PIECE = 4 << 20;

/** The file in pieces; each is valid until the next one is asked for. */
export function* pieces(path: string): Generator<Buffer> {
  const file = openSync(path, 'r');
  const buffer = Buffer.allocUnsafe(PIECE);
  try {
    for (let n = readSync(file, buffer); n > 0; n = readSync(file, buffer)) yield buffer.subarray(0, n);
  } finally {
    closeSync(file);
  }
}

async function* stream(path: string): AsyncGenerator<Uint8Array> {
  yield* pieces(path);
}

function numberAfter(bytes: Buffer, text: string, from: number): number {
  const at = bytes.indexOf(text, from, 'latin1') + text.length;
  return Number(bytes.toString('latin1', at, bytes.indexOf(34, at)));
}

/**
 * No metadata: finds the arrays by their tags, decodes the base64 and inflates into a buffer of the right size. No reader
 * that hands out peaks can do less.
 */
function inflateOnly(path: string): Counted {
  const counted = { spectra: 0, peaks: 0 };
  let rest = Buffer.alloc(0);
  for (const piece of pieces(path)) {
    const bytes = Buffer.concat([rest, piece]);
    let at = 0;
    for (;;) {
      const start = bytes.indexOf('<spectrum ', at, 'latin1');
      const end = start < 0 ? -1 : bytes.indexOf('</spectrum>', start, 'latin1');
      if (end < 0) break;
      const length = numberAfter(bytes, 'defaultArrayLength="', start);
      let from = start;
      for (const size of [8, 4]) {
        const begin = bytes.indexOf('<binary>', from, 'latin1') + 8;
        from = bytes.indexOf(60, begin);
        const packed = Buffer.from(bytes.toString('latin1', begin, from), 'base64');
        const raw = inflateSync(packed, { chunkSize: Math.max(64, length * size + 64) });
        if (size === 8) counted.peaks += raw.length / 8;
      }
      counted.spectra++;
      at = end;
    }
    rest = Buffer.from(bytes.subarray(at));
  }
  return counted;
}

async function ours(path: string, peaks: boolean): Promise<Counted> {
  const counted = { spectra: 0, peaks: 0 };
  for await (const event of readMzml(stream(path), { ...nodeReading, sha1: undefined, peaks })) {
    if (event.kind !== 'scan') continue;
    counted.spectra++;
    counted.peaks += peaks ? event.scan.peaks.mz.length : event.scan.peakCount;
  }
  return counted;
}

/** A standard XML parser over the whole document, with the same work on the arrays. */
function xmlStream(path: string): Counted {
  const counted = { spectra: 0, peaks: 0 };
  const parser = new SaxesParser();
  let length = 0;
  let arrays = 0;
  let text: string[] | null = null;
  const terms: string[] = [];
  parser.on('opentag', ({ name, attributes }) => {
    if (name === 'spectrum') {
      length = Number(attributes.defaultArrayLength);
      arrays = 0;
      counted.spectra++;
      terms.length = 0;
    } else if (name === 'cvParam') terms.push(attributes.accession, attributes.value);
    else if (name === 'binary') text = [];
  });
  parser.on('text', (part) => text?.push(part));
  parser.on('closetag', ({ name }) => {
    if (name !== 'binary' || !text) return;
    const size = arrays++ === 0 ? 8 : 4;
    const packed = Buffer.from(text.join(''), 'base64');
    const raw = inflateSync(packed, { chunkSize: Math.max(64, length * size + 64) });
    if (size === 8) counted.peaks += raw.length / 8;
    text = null;
  });
  for (const piece of pieces(path)) parser.write(piece.toString('latin1'));
  parser.close();
  return counted;
}

/** Opens the file by its index, then scans spread over it; `each` is the median wall time of one, ms. */
async function byIndex(path: string, opened: number): Promise<Counted> {
  const file = await open(path);
  const read = async (offset: number, length: number) => {
    const { buffer, bytesRead } = await file.read(Buffer.allocUnsafe(length), 0, length, offset);
    return buffer.subarray(0, bytesRead);
  };
  const run = await RandomAccessRun.open({ size: (await file.stat()).size, read }, nodeReading);
  if (run.origin !== 'file') throw new Error('The index of the file was not used');
  const times: number[] = [];
  for (let i = 0; i < opened; i++) {
    const { id } = run.entries[(i * STRIDE) % run.entries.length];
    const start = performance.now();
    await run.scan(id);
    times.push(performance.now() - start);
  }
  await file.close();
  return { spectra: run.entries.length, peaks: null, each: median(times) };
}

export const MODES = {
  limit: inflateOnly,
  full: (path: string) => ours(path, true),
  metadata: (path: string) => ours(path, false),
  'xml-stream': xmlStream,
  index: (path: string) => byIndex(path, 0),
  'by-index': (path: string) => byIndex(path, OPENED)
} as const satisfies Record<string, (path: string) => Counted | Promise<Counted>>;

export type Mode = keyof typeof MODES;
