/** One `binaryDataArray`: base64 -> zlib -> numbers. Little-endian always, as the mzML schema demands. */
import { CoreError } from '../errors';
import { decodeBase64 } from './base64';
import { COMPRESSIONS, CV, NUMBER_TYPES, UNSUPPORTED_COMPRESSIONS, type Compression, type NumberType } from './cv';
import { decodeLinear, decodePic, decodeSlof } from './numpress';
import type { ReadSettings } from './options';
import type { Params } from './params';
import type { BinaryText } from './record';

export interface ArrayDescription {
  kind: 'mz' | 'intensity' | 'other';
  type: NumberType | null;
  compression: Compression;
  /** accession of a compression that cannot be read. */
  unsupported: string | null;
}

const BYTES: Readonly<Record<NumberType, number>> = { f32: 4, f64: 8, i32: 4, i64: 8 };

/** What the parameters say about an array; several compression terms on one array add up (numpress, then zlib). */
export function describeArray(params: Params): ArrayDescription {
  const compression: Compression = { numpress: null, zlib: false };
  let type: NumberType | null = null;
  let unsupported: string | null = null;
  for (const { accession, name } of params.all) {
    if (accession === null) continue;
    const known = COMPRESSIONS.get(accession);
    if (known) {
      compression.numpress = known.numpress ?? compression.numpress;
      compression.zlib ||= known.zlib;
    } else if (UNSUPPORTED_COMPRESSIONS.has(accession) || /compression$/i.test(name)) {
      unsupported = accession;
    }
    type = NUMBER_TYPES.get(accession) ?? type;
  }
  const kind = params.has(CV.mzArray) ? 'mz' : params.has(CV.intensityArray) ? 'intensity' : 'other';
  return { kind, type, compression, unsupported };
}

/** The byte order of the machine, which typed arrays follow. */
const IS_LITTLE_ENDIAN = new Uint8Array(Uint16Array.of(1).buffer)[0] === 1;

/** The numbers of an array; they may share the memory of its bytes. */
function toDoubles(bytes: Uint8Array, type: NumberType): Float64Array {
  const size = BYTES[type];
  if (bytes.length % size !== 0) {
    throw new CoreError('bad-array', `An array of ${bytes.length} bytes does not hold whole numbers of ${size} bytes`);
  }
  const count = bytes.length / size;
  const aligned = IS_LITTLE_ENDIAN && bytes.byteOffset % size === 0 ? bytes : null;
  if (aligned && type === 'f64') return new Float64Array(bytes.buffer, bytes.byteOffset, count);
  if (aligned && type === 'f32') return new Float64Array(new Float32Array(bytes.buffer, bytes.byteOffset, count));
  const values = new Float64Array(count);
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  if (type === 'f64') for (let i = 0; i < count; i++) values[i] = view.getFloat64(i * 8, true);
  else if (type === 'f32') for (let i = 0; i < count; i++) values[i] = view.getFloat32(i * 4, true);
  else if (type === 'i32') for (let i = 0; i < count; i++) values[i] = view.getInt32(i * 4, true);
  else for (let i = 0; i < count; i++) values[i] = Number(view.getBigInt64(i * 8, true));
  return values;
}

/**
 * Decodes one array.
 * @param text base64
 * @param declared number of points the file declares; what inflates to far more than that is refused
 * @throws CoreError `bad-base64`, `bad-array`, `inflate-limit`, `limit` or `unsupported-compression`
 */
export function decodeArray(
  text: BinaryText,
  array: ArrayDescription,
  declared: number,
  settings: ReadSettings
): Float64Array {
  if (array.unsupported) {
    throw new CoreError(
      'unsupported-compression',
      `The array is compressed with ${array.unsupported.slice(0, 20)}, which cannot be read`,
      undefined,
      'Convert the file with zlib compression or none.'
    );
  }
  if (declared > settings.limits.arrayPoints) {
    throw new CoreError(
      'limit',
      `The spectrum declares ${declared} points, more than the ${settings.limits.arrayPoints} allowed`
    );
  }
  const lent = text.text === null ? null : settings.base64(text.text);
  let bytes = lent ?? decodeBase64(text.bytes);
  if (bytes.length === 0) return new Float64Array(0);
  const { numpress, zlib } = array.compression;
  if (zlib) {
    const size = numpress ? 5 : BYTES[array.type ?? 'f64'];
    const expected = declared * size + (numpress ? 16 : 0);
    bytes = settings.inflate(bytes, expected, declared * 8 + 65_536);
  } else if (lent) {
    bytes = new Uint8Array(lent);
  }
  if (numpress === 'linear') return decodeLinear(bytes);
  if (numpress === 'pic') return decodePic(bytes);
  if (numpress === 'slof') return decodeSlof(bytes);
  if (array.type === null)
    throw new CoreError('bad-array', 'The array does not say whether its numbers are 32-bit or 64-bit');
  return toDoubles(bytes, array.type);
}
