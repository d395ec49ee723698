import type { PeakList } from '$lib/core/model';

/** The byte order of the machine, which typed arrays follow. */
const IS_LITTLE_ENDIAN = new Uint8Array(Uint16Array.of(1).buffer)[0] === 1;

/**
 * Packs a peak list for a MEDIUMBLOB: m/z as 64-bit floats, then intensities as 32-bit floats, little-endian.
 * Twelve bytes a peak; 16 MB hold 1.3 million peaks.
 * @param peaks parallel arrays of m/z and intensity (counts)
 */
export function packPeaks(peaks: PeakList): Buffer {
  const n = peaks.mz.length;
  const out = Buffer.alloc(n * 12);
  if (IS_LITTLE_ENDIAN) {
    new Float64Array(out.buffer, out.byteOffset, n).set(peaks.mz);
    new Float32Array(out.buffer, out.byteOffset + n * 8, n).set(peaks.intensity);
    return out;
  }
  for (let i = 0; i < n; i++) out.writeDoubleLE(peaks.mz[i], i * 8);
  for (let i = 0; i < n; i++) out.writeFloatLE(peaks.intensity[i], n * 8 + i * 4);
  return out;
}

/** Inverse of {@link packPeaks}. @throws RangeError when the length is no multiple of 12 */
export function unpackPeaks(packed: Buffer): PeakList {
  if (packed.length % 12) throw new RangeError(`packed peaks: ${packed.length} bytes is no multiple of 12`);
  const n = packed.length / 12;
  if (IS_LITTLE_ENDIAN) {
    // A copy of its own begins at an address that fits, and is not kept alive by the answer of the database.
    const { buffer } = new Uint8Array(packed);
    return { mz: new Float64Array(buffer, 0, n), intensity: new Float64Array(new Float32Array(buffer, n * 8, n)) };
  }
  const mz = new Float64Array(n);
  const intensity = new Float64Array(n);
  for (let i = 0; i < n; i++) mz[i] = packed.readDoubleLE(i * 8);
  for (let i = 0; i < n; i++) intensity[i] = packed.readFloatLE(n * 8 + i * 4);
  return { mz, intensity };
}
