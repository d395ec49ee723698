import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { ionMz, parseFormula } from '../chem';
import { type PeakList } from '../model';
import { chargeFromSpacing, ionIsotopePeaks, isotopeLogLikelihood, isotopePattern } from './index';

const TOLERANCE = { ppm: 10, mda: 2 };

const measured = (formula: string, charge: number, minRelative = 0.005): PeakList => {
  const peaks = ionIsotopePeaks(parseFormula(formula), charge, minRelative);
  return { mz: Float64Array.from(peaks, (p) => p.mz), intensity: Float64Array.from(peaks, (p) => p.relative * 1e6) };
};

describe('isotope patterns', () => {
  it('sum to one and start at the monoisotopic m/z', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 60 }),
        fc.integer({ min: 0, max: 3 }),
        fc.integer({ min: 0, max: 3 }),
        (C, Cl, S) => {
          const ion = { C, H: 2 * C, Cl, S };
          const total = isotopePattern(ion).abundance.reduce((a, b) => a + b, 0);
          expect(total).toBeCloseTo(1, 6);
          const mono = ionIsotopePeaks(ion, 1).find((p) => p.offset === 0);
          expect(mono?.mz).toBeCloseTo(ionMz(ion, 1), 8);
        }
      )
    );
  });

  it('counts from the most abundant isotope where that is not the lightest (boron)', () => {
    const peaks = ionIsotopePeaks(parseFormula('C6H8BO2'), 1);
    expect(peaks[0].offset).toBe(-1);
    expect(peaks.find((p) => p.offset === 0)?.mz).toBeCloseTo(ionMz(parseFormula('C6H8BO2'), 1), 3);
  });
});

describe('likelihood of a measured pattern', () => {
  it('is near 0 under the right formula and far below it when a chlorine is taken for something else', () => {
    const ms1 = measured('C11H13Cl2N2O5', 1);
    const under = (formula: string) =>
      isotopeLogLikelihood(ms1, parseFormula(formula), 1, { ppm: 1000, mda: 1 }) ?? NaN;
    expect(under('C11H13Cl2N2O5')).toBeGreaterThan(-0.01);
    // one chlorine too few: M+2 would be half as high
    expect(under('C11H16ClN2O7')).toBeLessThan(-5);
  });

  it('falls with the number of carbons off', () => {
    const ms1 = measured('C20H25N2O4', 1);
    const scale = (factor: number): PeakList => ({
      mz: ms1.mz,
      intensity: ms1.intensity.map((v, i) => (i === 0 ? v : v * factor))
    });
    const at = (factor: number) => isotopeLogLikelihood(scale(factor), parseFormula('C20H25N2O4'), 1, TOLERANCE) ?? NaN;
    expect(at(1)).toBeGreaterThan(at(1.2));
    expect(at(1.2)).toBeGreaterThan(at(1.5));
  });

  it('says nothing without the monoisotopic peak', () => {
    const empty = { mz: new Float64Array(0), intensity: new Float64Array(0) };
    expect(isotopeLogLikelihood(empty, parseFormula('C6H7'), 1, TOLERANCE)).toBeNull();
  });
});

describe('charge from isotope spacing', () => {
  it.each([1, 2, 3])('reads %i', (charge) => {
    const mz = ionMz(parseFormula('C60H90N10O14'), charge);
    expect(chargeFromSpacing(measured('C60H90N10O14', charge), mz, { ppm: 10, mda: 3 })).toBe(charge);
  });

  it('is unknown for a lone peak', () => {
    const lone = { mz: Float64Array.of(300), intensity: Float64Array.of(1) };
    expect(chargeFromSpacing(lone, 300, { ppm: 10, mda: 3 })).toBeNull();
  });
});
