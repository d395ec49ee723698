import { describe, expect, it } from 'vitest';
import { packPeaks, unpackPeaks } from './packing';

describe('packed peaks', () => {
  it('keep m/z to the last bit and intensities to 32-bit precision', () => {
    const peaks = { mz: Float64Array.of(100.000000001, 361.17580001), intensity: Float64Array.of(12.5, 1e7 / 3) };
    const back = unpackPeaks(packPeaks(peaks));
    expect([...back.mz]).toEqual([...peaks.mz]);
    expect([...back.intensity]).toEqual([12.5, Math.fround(1e7 / 3)]);
  });

  it('are twelve bytes a peak, none for an empty spectrum', () => {
    expect(packPeaks({ mz: new Float64Array(3), intensity: new Float64Array(3) })).toHaveLength(36);
    expect(unpackPeaks(Buffer.alloc(0)).mz).toHaveLength(0);
  });

  it('refuse a length that cannot be', () => {
    expect(() => unpackPeaks(Buffer.alloc(13))).toThrow(RangeError);
  });
});
