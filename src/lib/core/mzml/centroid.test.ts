import { describe, expect, it } from 'vitest';
import type { PeakList } from '../model';
import { centroid, isCentroided } from './centroid';

/** Gaussian peaks [m/z, height] of one width, sampled at even steps. */
function profile(peaks: [number, number][], sigma: number, step: number): PeakList {
  const from = peaks[0][0] - 10 * sigma;
  const count = Math.ceil((peaks[peaks.length - 1][0] + 10 * sigma - from) / step);
  const mz = Float64Array.from({ length: count }, (_value, i) => from + i * step);
  const intensity = mz.map((x) =>
    peaks.reduce((sum, [at, height]) => sum + height * Math.exp(-((x - at) ** 2) / (2 * sigma ** 2)), 0)
  );
  return { mz, intensity: intensity.map((value) => (value < 1e-3 ? 0 : value)) };
}

const sticks: PeakList = {
  mz: Float64Array.from({ length: 60 }, (_value, i) => 100 + i * 1.0004),
  intensity: Float64Array.from({ length: 60 }, (_value, i) => 100 + 80 * Math.sin(i))
};

describe('centroid', () => {
  it('finds the apex of sampled Gaussians exactly, whatever the phase of the sampling', () => {
    for (const phase of [0, 0.0003, 0.0007, 0.0011]) {
      const found = centroid(
        profile(
          [
            [300.1 + phase, 1000],
            [300.2 + phase, 400]
          ],
          0.004,
          0.0015
        )
      );
      expect(found.mz).toHaveLength(2);
      expect(found.mz[0]).toBeCloseTo(300.1 + phase, 6);
      expect(found.mz[1]).toBeCloseTo(300.2 + phase, 6);
      expect(found.intensity[0]).toBeCloseTo(1000, 3);
      expect(found.intensity[1]).toBeCloseTo(400, 3);
    }
  });

  it('keeps two peaks apart only with a valley between them', () => {
    expect(
      centroid(
        profile(
          [
            [300, 1000],
            [300.02, 900]
          ],
          0.004,
          0.001
        )
      ).mz
    ).toHaveLength(2);
    expect(
      centroid(
        profile(
          [
            [300, 1000],
            [300.006, 900]
          ],
          0.004,
          0.001
        )
      ).mz
    ).toHaveLength(1);
  });

  it('gives nothing for an empty spectrum', () => {
    expect(centroid({ mz: new Float64Array(0), intensity: new Float64Array(0) }).mz).toHaveLength(0);
  });
});

describe('isCentroided', () => {
  const sampled = profile(
    [
      [300, 1000],
      [300.2, 900],
      [300.5, 100]
    ],
    0.01,
    0.003
  );

  it('believes the flag where the data agree', () => {
    expect(isCentroided(sampled, false)).toBe(false);
    expect(isCentroided(sticks, true)).toBe(true);
  });

  it('overrules a wrong flag', () => {
    expect(isCentroided(sampled, true)).toBe(false);
    expect(isCentroided(sticks, false)).toBe(true);
  });

  it('decides by the data where there is no flag', () => {
    expect(isCentroided(sampled, null)).toBe(false);
    expect(isCentroided(sticks, null)).toBe(true);
  });
});
