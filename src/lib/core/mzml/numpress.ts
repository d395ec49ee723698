/**
 * MS-Numpress decoders. Method: Teleman et al., "Numerical compression schemes for proteomics mass spectrometry data",
 * Mol. Cell. Proteomics 13, 1537-1542 (2014). Errors are thrown as `bad-array`; the caller adds the scan.
 */
import { CoreError } from '../errors';

function corrupt(what: string): CoreError {
  return new CoreError('bad-array', `MS-Numpress data are corrupt: ${what}`);
}

/** Reads integers of 1 to 9 half bytes: a count of dropped leading half bytes, then the rest, least significant first. */
class HalfByteReader {
  private position: number;
  private readonly end: number;

  constructor(
    private readonly bytes: Uint8Array,
    firstByte: number
  ) {
    this.position = firstByte * 2;
    this.end = bytes.length * 2;
  }

  private next(): number {
    if (this.position >= this.end) throw corrupt('it ends in the middle of a number');
    const byte = this.bytes[this.position >> 1];
    return (this.position++ & 1) === 0 ? byte >> 4 : byte & 15;
  }

  /** True while another number follows; a lone zero half byte at the very end is padding. */
  more(): boolean {
    if (this.position >= this.end) return false;
    if (this.position === this.end - 1 && (this.bytes[this.position >> 1] & 15) === 0) return false;
    return true;
  }

  /** The next signed 32-bit integer. */
  readInt(): number {
    const head = this.next();
    const dropped = head <= 8 ? head : head - 8;
    let value = 0;
    for (let i = 0; i < 8 - dropped; i++) value |= this.next() << (i * 4);
    if (head > 8) for (let i = 8 - dropped; i < 8; i++) value |= 15 << (i * 4);
    return value;
  }
}

function fixedPoint(bytes: Uint8Array): number {
  const value = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength).getFloat64(0, false);
  if (!Number.isFinite(value) || value <= 0) throw corrupt('its scaling factor is not a positive number');
  return value;
}

/** Decodes linear prediction (MS:1002312). Returns as many doubles as were encoded. */
export function decodeLinear(bytes: Uint8Array): Float64Array {
  if (bytes.length === 0) return new Float64Array(0);
  if (bytes.length < 8 || (bytes.length > 8 && bytes.length < 12) || (bytes.length > 12 && bytes.length < 16)) {
    throw corrupt(`${bytes.length} bytes are no possible length of a linear array`);
  }
  if (bytes.length === 8) return new Float64Array(0);
  const scale = fixedPoint(bytes);
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  let before = view.getUint32(8, true);
  if (bytes.length === 12) return Float64Array.of(before / scale);
  let last = view.getUint32(12, true);
  const values = new Float64Array(2 + (bytes.length - 16) * 2);
  values[0] = before / scale;
  values[1] = last / scale;
  let count = 2;
  const reader = new HalfByteReader(bytes, 16);
  while (reader.more()) {
    const next = 2 * last - before + reader.readInt();
    values[count++] = next / scale;
    before = last;
    last = next;
  }
  return values.subarray(0, count);
}

/** Decodes positive integers (MS:1002313). Returns as many doubles as were encoded. */
export function decodePic(bytes: Uint8Array): Float64Array {
  const values = new Float64Array(bytes.length * 2);
  let count = 0;
  const reader = new HalfByteReader(bytes, 0);
  while (reader.more()) {
    const value = reader.readInt();
    if (value < 0) throw corrupt('a positive-integer array holds a negative number');
    values[count++] = value;
  }
  return values.subarray(0, count);
}

/** Decodes short logged floats (MS:1002314). Returns as many doubles as were encoded. */
export function decodeSlof(bytes: Uint8Array): Float64Array {
  if (bytes.length === 0) return new Float64Array(0);
  if (bytes.length < 8 || bytes.length % 2 !== 0) {
    throw corrupt(`${bytes.length} bytes are no possible length of a short-logged-float array`);
  }
  const scale = fixedPoint(bytes);
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const values = new Float64Array((bytes.length - 8) / 2);
  for (let i = 0; i < values.length; i++) values[i] = Math.exp(view.getUint16(8 + i * 2, true) / scale) - 1;
  return values;
}
