import { IsotopicDistribution } from 'isotopic-distribution';
import { describe, expect, it } from 'vitest';
import { parseFormula } from '../../src/lib/core/chem';
import { isotopePattern } from '../../src/lib/core/isotope';

/** M+1, M+2 and M+3 in per cent of the monoisotopic peak, from IUPAC abundances of 2013 (Pure Appl. Chem. 88, 293). */
const PATTERNS: readonly (readonly [formula: string, first: number, second: number, third: number])[] = [
  ['C8H10N4O2', 10.31, 0.89, 0.06],
  ['C15H10O7', 16.61, 2.73, 0.3],
  ['C33H40N2O9', 37.23, 8.58, 1.48],
  ['C37H67NO13', 41.65, 11.13, 2.23],
  ['C11H12Cl2N2O5', 12.96, 65.79, 8.45],
  ['C12H22O11', 13.65, 3.12, 0.34],
  ['C10H17N3O6S', 13.13, 6.5, 0.74],
  ['C27H46O', 29.77, 4.48, 0.45],
  ['C9H11Cl3NO3PS', 11.13, 101.64, 11.23],
  ['C14H10BrN3O', 16.39, 98.74, 16.04],
  ['C17H20N4O6', 20.31, 3.19, 0.37],
  ['C22H24N2O8', 25.11, 4.67, 0.64],
  ['C27H30O16', 30.16, 7.68, 1.4]
];

describe('isotope patterns', () => {
  it.each(PATTERNS)('%s', (formula, ...expected) => {
    const { abundance } = isotopePattern(parseFormula(formula));
    expected.forEach((percent, i) => {
      expect(Math.abs((abundance[i + 1] / abundance[0]) * 100 - percent)).toBeLessThan(0.006);
    });
  });

  // npm isotopic-distribution has its own tables of masses and abundances.
  it.each(PATTERNS)('%s agrees with an independent library', (formula) => {
    const peaks = new IsotopicDistribution(formula, { fwhm: 0.4 }).getDistribution().array;
    const { abundance, mass } = isotopePattern(parseFormula(formula));
    const base = peaks[0].y;
    for (let i = 0; i < 4; i++) {
      expect(Math.abs(abundance[i] / abundance[0] - peaks[i].y / base)).toBeLessThan(1e-5);
      expect(Math.abs(mass[i] - peaks[i].x)).toBeLessThan(2e-5);
    }
  });
});
