/** What a caller can pass to the reader, and the defaults. */
import { inflateWithPako } from './inflate';

/** Bounds against hostile files; all are counts of bytes or elements of the uncompressed stream. */
export interface ReadLimits {
  /** everything before the first spectrum; the XML parser takes about a hundred times as much memory. */
  headBytes: number;
  /** one spectrum, its base64 text included. */
  spectrumBytes: number;
  /** XML of one spectrum without its base64 text, and the longest tag. */
  spectrumXmlBytes: number;
  /** nesting of elements. */
  depth: number;
  /** spectra that cannot be read; more of them are no accident. */
  failures: number;
  /** points of one array. */
  arrayPoints: number;
  /** inflated size of a whole gz file. */
  gzipBytes: number;
  /** inflated / compressed size of a gz file, judged after the first 10 MB. */
  gzipRatio: number;
}

export const DEFAULT_LIMITS: ReadLimits = {
  headBytes: 4 * 2 ** 20,
  spectrumBytes: 256 * 2 ** 20,
  spectrumXmlBytes: 2 * 2 ** 20,
  depth: 60,
  failures: 100_000,
  arrayPoints: 20_000_000,
  gzipBytes: 64 * 2 ** 30,
  gzipRatio: 200
};

/** Streaming SHA-1 of the caller's platform, e.g. a thin wrapper of `node:crypto`. */
export interface StreamingHash {
  update(bytes: Uint8Array): void;
  /** lower-case hexadecimal digits. */
  hex(): string;
}

/**
 * Inflates one zlib stream. Must stop and throw once more than `maxLength` bytes come out; `expectedLength` is what the
 * file declares, a hint for the size of the buffer.
 */
export type Inflate = (bytes: Uint8Array, expectedLength: number, maxLength: number) => Uint8Array;

/**
 * Decodes base64 text that a platform knows how to decode fast. Returns null for everything but whole quartets of the
 * alphabet of RFC 4648, section 4, with its padding: the reader then decodes it by itself, or says what is wrong. The
 * bytes need only be valid until the next call.
 */
export type QuickBase64 = (text: string) => Uint8Array | null;

/** Bytes as text with exactly one letter for each: ASCII as it is, others as any letter that is no printable ASCII. */
export type ByteText = (bytes: Uint8Array) => string;

export interface ReadOptions {
  /** bytes as text for searching, as ISO 8859-1 for example; default: the reader's own. */
  byteText?: ByteText;
  /** base64 of plainly written arrays; default: the reader's own. */
  base64?: QuickBase64;
  /** zlib of one array; default: pako. */
  inflate?: Inflate;
  /** gzip of the whole file (all members); default: pako. */
  gunzip?: (source: AsyncIterable<Uint8Array>) => AsyncIterable<Uint8Array>;
  /** makes the hash that `fileChecksum` is compared with; without it the checksum is not verified. */
  sha1?: () => StreamingHash;
  /** false: spectra are handed out as written; default true: profile spectra are centroided. */
  centroid?: boolean;
  /** false: arrays are not decoded and peak lists are empty (metadata only); default true. */
  peaks?: boolean;
  /** false: every spectrum goes through the XML parser, which is slow and gives the same; default true. */
  quick?: boolean;
  /** called after every piece of input: bytes of the source taken so far, and scans read. */
  onProgress?: (bytes: number, scans: number) => void;
  /** asked after every piece of input; true ends the reading with a CoreError `cancelled`. */
  isCancelled?: () => boolean;
  limits?: Partial<ReadLimits>;
}

/** Options with every default filled in. */
export interface ReadSettings {
  inflate: Inflate;
  base64: QuickBase64;
  centroid: boolean;
  peaks: boolean;
  limits: ReadLimits;
}

/** Fills in the defaults. */
export function readSettings(options: ReadOptions): ReadSettings {
  return {
    inflate: options.inflate ?? inflateWithPako,
    base64: options.base64 ?? (() => null),
    centroid: options.centroid ?? true,
    peaks: options.peaks ?? true,
    limits: { ...DEFAULT_LIMITS, ...options.limits }
  };
}
