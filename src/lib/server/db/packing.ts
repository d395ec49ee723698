import type { PeakList } from '$lib/core/model';

/**
 * Packs a peak list for a MEDIUMBLOB: m/z as 64-bit floats, then intensities as 32-bit floats, little-endian.
 * Twelve bytes a peak; 16 MB hold 1.3 million peaks.
 * @param peaks parallel arrays of m/z and intensity (counts)
 */
export function packPeaks(peaks: PeakList): Buffer {
  const n = peaks.mz.length;
  const out = Buffer.alloc(n * 12);
  for (let i = 0; i < n; i++) out.writeDoubleLE(peaks.mz[i], i * 8);
  for (let i = 0; i < n; i++) out.writeFloatLE(peaks.intensity[i], n * 8 + i * 4);
  return out;
}

/** Inverse of {@link packPeaks}. @throws RangeError when the length is no multiple of 12 */
export function unpackPeaks(packed: Buffer): PeakList {
  if (packed.length % 12) throw new RangeError(`packed peaks: ${packed.length} bytes is no multiple of 12`);
  const n = packed.length / 12;
  const mz = new Float64Array(n);
  const intensity = new Float64Array(n);
  for (let i = 0; i < n; i++) mz[i] = packed.readDoubleLE(i * 8);
  for (let i = 0; i < n; i++) intensity[i] = packed.readFloatLE(n * 8 + i * 4);
  return { mz, intensity };
}
