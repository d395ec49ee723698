/** The index at the end of an mzML file: where each spectrum begins. */
import { CoreError } from '../errors';
import type { RandomAccessSource, ScanEntry } from './random-access';
import { decodeEntities } from './xml';

/** The offset of the index stands in the last bytes of a file. */
const TAIL = 4096;
/** Bytes of an index read at once. */
const PIECE = 4 << 20;
/** Longer entries, and so longer native ids, are none. */
const LONGEST_ENTRY = 64 << 10;

const LIST_OFFSET = /<(?:[\w.-]+:)?indexListOffset>\s*(\d{1,15})\s*</;
const ENTRY =
  /<(?:[\w.-]+:)?offset\s[^<>]*?idRef\s*=\s*(?:"([^"]*)"|'([^']*)')[^<>]*>\s*(\d{1,15})\s*<|<(?:[\w.-]+:)?index\s[^<>]*?name\s*=\s*["']([^"']*)["']/g;

/** Takes the entries of the index named `spectrum` from text in pieces. */
class EntryReader {
  readonly entries: ScanEntry[] = [];
  private rest = '';
  private isSpectra = false;

  take(piece: string): void {
    const text = this.rest + piece;
    let behind = 0;
    ENTRY.lastIndex = 0;
    for (let found = ENTRY.exec(text); found; found = ENTRY.exec(text)) {
      behind = ENTRY.lastIndex;
      if (found[4] !== undefined) this.isSpectra = found[4] === 'spectrum';
      else if (this.isSpectra) this.entries.push({ id: idOf(found[1] ?? found[2]), byte: Number(found[3]) });
    }
    this.rest = text.slice(Math.max(behind, text.length - LONGEST_ENTRY));
  }
}

const idOf = (written: string) => decodeEntities(written.trim());

async function listOffset(source: RandomAccessSource): Promise<number | null> {
  const from = Math.max(0, source.size - TAIL);
  const tail = new TextDecoder('iso-8859-1').decode(await source.read(from, source.size - from));
  const offset = Number(LIST_OFFSET.exec(tail)?.[1] ?? NaN);
  return offset > 0 && offset < source.size ? offset : null;
}

/**
 * The entries of the index, in the order of the file, or null where there is no index that could be right: each offset
 * within the file and behind the one before.
 * @param decoder of the file's text encoding
 */
export async function readIndexList(source: RandomAccessSource, decoder: TextDecoder): Promise<ScanEntry[] | null> {
  const begin = await listOffset(source);
  if (begin === null) return null;
  const reader = new EntryReader();
  try {
    for (let at = begin; at < source.size; at += PIECE) {
      const bytes = await source.read(at, Math.min(PIECE, source.size - at));
      const text = decoder.decode(bytes, { stream: true });
      if (at === begin && !/^\s*<(?:[\w.-]+:)?indexList[\s>]/.test(text)) return null;
      reader.take(text);
    }
  } catch (error) {
    // An undefined entity in an id: such an index is of no use.
    if (error instanceof CoreError) return null;
    throw error;
  } finally {
    decoder.decode();
  }
  const { entries } = reader;
  const isOrdered = entries.every((entry, i) => entry.byte < begin && (i === 0 || entry.byte > entries[i - 1].byte));
  return isOrdered && entries.length > 0 ? entries : null;
}
