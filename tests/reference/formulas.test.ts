import { describe, expect, it } from 'vitest';
import { parseElementRanges } from '../../src/lib/core/chem';
import {
  enumerateFormulas,
  ratioClass,
  withinElementMaxima,
  withinJointLimits,
  type FormulaHit
} from '../../src/lib/core/formula';

/**
 * Exhaustive counts, C at least 1, rings plus double bonds whole and not negative (valences N3 O2 P3 S2), window
 * ±ppm·1e-6·M. The last set applies element maxima, common ratios and joint limits of Kind & Fiehn, BMC
 * Bioinformatics 8:105 (2007), read strictly.
 */
// prettier-ignore
const COUNTS: readonly (readonly [mass: number, ppm: number, set: string, count: number])[] = [
  [194.080376, 10, 'CHNO', 2],
  [194.080376, 5, 'CHNO', 1],
  [194.080376, 3, 'CHNO', 1],
  [194.080376, 1, 'CHNO', 1],
  [194.080376, 10, 'CHNOPS', 6],
  [194.080376, 5, 'CHNOPS', 3],
  [194.080376, 3, 'CHNOPS', 2],
  [194.080376, 1, 'CHNOPS', 1],
  [194.080376, 10, 'CHNOPS_KF_rules_1_4_5_6', 4],
  [194.080376, 5, 'CHNOPS_KF_rules_1_4_5_6', 2],
  [194.080376, 3, 'CHNOPS_KF_rules_1_4_5_6', 2],
  [194.080376, 1, 'CHNOPS_KF_rules_1_4_5_6', 1],
  [302.042653, 10, 'CHNO', 5],
  [302.042653, 5, 'CHNO', 3],
  [302.042653, 3, 'CHNO', 1],
  [302.042653, 1, 'CHNO', 1],
  [302.042653, 10, 'CHNOPS', 43],
  [302.042653, 5, 'CHNOPS', 24],
  [302.042653, 3, 'CHNOPS', 13],
  [302.042653, 1, 'CHNOPS', 4],
  [302.042653, 10, 'CHNOPS_KF_rules_1_4_5_6', 23],
  [302.042653, 5, 'CHNOPS_KF_rules_1_4_5_6', 13],
  [302.042653, 3, 'CHNOPS_KF_rules_1_4_5_6', 8],
  [302.042653, 1, 'CHNOPS_KF_rules_1_4_5_6', 3],
  [349.109627, 10, 'CHNO', 9],
  [349.109627, 5, 'CHNO', 5],
  [349.109627, 3, 'CHNO', 2],
  [349.109627, 1, 'CHNO', 1],
  [349.109627, 10, 'CHNOPS', 48],
  [349.109627, 5, 'CHNOPS', 26],
  [349.109627, 3, 'CHNOPS', 14],
  [349.109627, 1, 'CHNOPS', 5],
  [349.109627, 10, 'CHNOPS_KF_rules_1_4_5_6', 26],
  [349.109627, 5, 'CHNOPS_KF_rules_1_4_5_6', 14],
  [349.109627, 3, 'CHNOPS_KF_rules_1_4_5_6', 9],
  [349.109627, 1, 'CHNOPS_KF_rules_1_4_5_6', 3],
  [400.2, 10, 'CHNO', 9],
  [400.2, 5, 'CHNO', 5],
  [400.2, 3, 'CHNO', 4],
  [400.2, 1, 'CHNO', 2],
  [400.2, 10, 'CHNOPS', 48],
  [400.2, 5, 'CHNOPS', 22],
  [400.2, 3, 'CHNOPS', 16],
  [400.2, 1, 'CHNOPS', 4],
  [400.2, 10, 'CHNOPS_KF_rules_1_4_5_6', 36],
  [400.2, 5, 'CHNOPS_KF_rules_1_4_5_6', 14],
  [400.2, 3, 'CHNOPS_KF_rules_1_4_5_6', 10],
  [400.2, 1, 'CHNOPS_KF_rules_1_4_5_6', 3],
  [500.2, 10, 'CHNO', 21],
  [500.2, 5, 'CHNO', 13],
  [500.2, 3, 'CHNO', 8],
  [500.2, 1, 'CHNO', 2],
  [500.2, 10, 'CHNOPS', 168],
  [500.2, 5, 'CHNOPS', 81],
  [500.2, 3, 'CHNOPS', 49],
  [500.2, 1, 'CHNOPS', 15],
  [500.2, 10, 'CHNOPS_KF_rules_1_4_5_6', 105],
  [500.2, 5, 'CHNOPS_KF_rules_1_4_5_6', 51],
  [500.2, 3, 'CHNOPS_KF_rules_1_4_5_6', 31],
  [500.2, 1, 'CHNOPS_KF_rules_1_4_5_6', 8],
  [608.273381, 10, 'CHNO', 35],
  [608.273381, 5, 'CHNO', 16],
  [608.273381, 3, 'CHNO', 9],
  [608.273381, 1, 'CHNO', 3],
  [608.273381, 10, 'CHNOPS', 327],
  [608.273381, 5, 'CHNOPS', 163],
  [608.273381, 3, 'CHNOPS', 95],
  [608.273381, 1, 'CHNOPS', 30],
  [608.273381, 10, 'CHNOPS_KF_rules_1_4_5_6', 219],
  [608.273381, 5, 'CHNOPS_KF_rules_1_4_5_6', 106],
  [608.273381, 3, 'CHNOPS_KF_rules_1_4_5_6', 62],
  [608.273381, 1, 'CHNOPS_KF_rules_1_4_5_6', 19]
];

const ELEMENTS: Readonly<Record<string, string>> = {
  CHNO: 'C1-200H0-400N0-60O0-60',
  CHNOPS: 'C1-200H0-400N0-60O0-60P0-20S0-20'
};

const obeysRules = ({ composition }: FormulaHit) =>
  withinElementMaxima(composition) && ratioClass(composition) === 'common' && withinJointLimits(composition);

const find = (mass: number, ppm: number, set: string) => {
  const elements = parseElementRanges(ELEMENTS[set] ?? ELEMENTS.CHNOPS);
  const hits = enumerateFormulas(mass, mass * ppm * 1e-6, elements, { minDbe: 0, parity: 'whole' });
  return set in ELEMENTS ? hits : hits.filter(obeysRules);
};

describe('numbers of candidate formulas', () => {
  it.each(COUNTS)('%d u, %d ppm, %s: %i', (mass, ppm, set, count) => {
    expect(find(mass, ppm, set)).toHaveLength(count);
  });

  it('302.042653 u, 5 ppm, CHNO: the listed formulas', () => {
    expect(
      find(302.042653, 5, 'CHNO')
        .map((h) => h.formula)
        .sort()
    ).toEqual(['C12H2N10O', 'C15H10O7', 'C16H6N4O3']);
  });

  it('194.080376 u, 5 ppm, CHNO: the listed formulas', () => {
    expect(
      find(194.080376, 5, 'CHNO')
        .map((h) => h.formula)
        .sort()
    ).toEqual(['C8H10N4O2']);
  });
});
