import { describe, expect, it } from 'vitest';
import { breakdownOf, energyOf } from './breakdown';

const scan = (energy: number | null, share: number) => ({
  energy,
  peaks: { mz: Float64Array.of(100, 200), intensity: Float64Array.of(share * 50, (1 - share) * 50) }
});

describe('breakdownOf', () => {
  it('averages the share of the ion over the scans of each energy, in order of energy', () => {
    const points = breakdownOf([scan(40, 0.2), scan(20, 0.8), scan(20, 0.6), scan(null, 1)], 100.001, 0.01);
    expect(points.map((p) => [p.energy, p.scans])).toEqual([
      [20, 2],
      [40, 1]
    ]);
    expect(points[0].share).toBeCloseTo(0.7, 12);
  });

  it('counts an empty scan as share 0', () => {
    const empty = { energy: 10, peaks: { mz: new Float64Array(), intensity: new Float64Array() } };
    expect(breakdownOf([empty], 100, 0.01)).toEqual([{ energy: 10, share: 0, scans: 1 }]);
  });
});

describe('energyOf', () => {
  it('takes the last precursor and refuses to guess', () => {
    expect(energyOf({ precursors: [{ energy: 20 }, { energy: 35 }] })).toBe(35);
    expect(energyOf({ precursors: [] })).toBeNull();
    expect(energyOf(null)).toBeNull();
  });
});
