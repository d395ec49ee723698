import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { mergePeaks } from './merge';

const list = (...ions: [number, number][]) => ({
  mz: Float64Array.from(ions, (ion) => ion[0]),
  intensity: Float64Array.from(ions, (ion) => ion[1])
});

describe('mergePeaks', () => {
  it('gives a single list back as measured, without zeros', () => {
    const { peaks, scanCounts } = mergePeaks([list([100, 1], [100.0001, 2], [101, 0])], 'orbitrap');
    expect([...peaks.mz]).toEqual([100, 100.0001]);
    expect([...scanCounts]).toEqual([1, 1]);
  });

  it('weights m/z by intensity and never takes two peaks of one scan for one ion', () => {
    const { peaks, scanCounts } = mergePeaks([list([100, 1], [100.001, 3]), list([100.0012, 1])], 'orbitrap');
    expect([...peaks.mz].map((mz) => mz.toFixed(5))).toEqual(['100.00000', '100.00105']);
    expect([...scanCounts]).toEqual([1, 2]);
  });

  it('merges unit resolution within 0.3', () => {
    expect(mergePeaks([list([100, 1]), list([100.25, 1]), list([101, 1])], 'ion-trap').peaks.mz).toHaveLength(2);
  });

  it('keeps the mean ion current, the order of m/z and counts within the number of lists', () => {
    const ions = fc.array(
      fc.tuple(fc.double({ min: 50, max: 52, noNaN: true }), fc.double({ min: 0.001, max: 9, noNaN: true })),
      { maxLength: 30 }
    );
    fc.assert(
      fc.property(fc.array(ions, { minLength: 2, maxLength: 5 }), (raw) => {
        const lists = raw.map((one) =>
          list(...one.map(([mz, i]): [number, number] => [mz, i]).sort((a, b) => a[0] - b[0]))
        );
        const { peaks, scanCounts } = mergePeaks(lists, 'tof');
        const total = lists.reduce((sum, one) => sum + one.intensity.reduce((a, b) => a + b, 0), 0);
        expect(peaks.intensity.reduce((a, b) => a + b, 0) * lists.length).toBeCloseTo(total, 6);
        expect([...peaks.mz].every((mz, i, all) => i === 0 || mz >= all[i - 1])).toBe(true);
        expect([...scanCounts].every((count) => count >= 1 && count <= lists.length)).toBe(true);
      })
    );
  });
});
