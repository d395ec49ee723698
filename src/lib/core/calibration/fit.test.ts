import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { correctedMz, fitMassError, predictedError } from './index';

const line = (shift: number, slope: number, n = 20) =>
  Array.from({ length: n }, (_, i) => ({ mz: 80 + 20 * i, errorPpm: shift + slope * (80 + 20 * i - 270) }));

describe('robust fit of the mass error', () => {
  it('needs four points', () => {
    expect(fitMassError(line(1, 0, 3))).toBeNull();
    expect(fitMassError(line(1, 0, 4))?.shift).toBeCloseTo(1);
  });

  it('finds shift and trend exactly on a line', () => {
    const fit = fitMassError(line(2.5, -0.01))!;
    expect(fit.slope).toBeCloseTo(-0.01, 10);
    expect(predictedError(fit, 80)).toBeCloseTo(2.5 + 1.9, 8);
    expect(fit.spread).toBeCloseTo(0, 8);
  });

  it('is not moved by wrong assignments, and names them', () => {
    const points = line(1, 0).map((point, i) => ({ ...point, errorPpm: point.errorPpm + 0.1 * (i % 3) }));
    points[3].errorPpm = 40;
    points[11].errorPpm = -35;
    const fit = fitMassError(points)!;
    expect(fit.shift).toBeGreaterThan(0.9);
    expect(fit.shift).toBeLessThan(1.2);
    expect(fit.outliers).toEqual([3, 11]);
  });

  it('tells no trend from a narrow range', () => {
    const narrow = Array.from({ length: 12 }, (_, i) => ({ mz: 200 + i, errorPpm: i }));
    expect(fitMassError(narrow)?.slope).toBe(0);
  });

  it('corrects so that the predicted error is gone', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -20, max: 20, noNaN: true }),
        fc.double({ min: 60, max: 1500, noNaN: true }),
        (shift, mz) => {
          const found = mz * (1 + shift * 1e-6);
          const corrected = correctedMz({ shift, slope: 0, centre: mz }, found);
          expect(Math.abs(corrected / mz - 1) * 1e6).toBeLessThan(1e-3);
        }
      )
    );
  });
});
