import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { dbe, ionMz, isSubset, monoisotopicMass, parseElementRanges, parseFormula } from '../chem';
import {
  enumerateFormulas,
  forEachFormula,
  formulaSpace,
  obeysSenior,
  ratioClass,
  subformulas,
  toleranceFor,
  windowAt,
  withinElementMaxima,
  withinJointLimits
} from './index';

/** Plain nested loops over all counts: slow and obviously right. */
function byLoops(ranges: Record<string, readonly [number, number]>, low: number, high: number): string[] {
  let all: Record<string, number>[] = [{}];
  for (const [symbol, [min, max]] of Object.entries(ranges)) {
    all = all.flatMap((c) => Array.from({ length: max - min + 1 }, (_, i) => ({ ...c, [symbol]: min + i })));
  }
  return all
    .filter((c) => monoisotopicMass(c) >= low && monoisotopicMass(c) <= high)
    .map((c) =>
      Object.keys(ranges)
        .map((s) => `${s}${c[s]}`)
        .join('')
    )
    .sort();
}

describe('enumeration', () => {
  it('equals plain loops for any window, wide ones included', () => {
    fc.assert(
      fc.property(
        fc.record({
          C: fc.integer({ min: 0, max: 8 }),
          H: fc.integer({ min: 0, max: 14 }),
          N: fc.integer({ min: 0, max: 2 }),
          O: fc.integer({ min: 0, max: 3 }),
          S: fc.integer({ min: 0, max: 1 })
        }),
        fc.integer({ min: 0, max: 2 }),
        fc.integer({ min: 1000, max: 250_000 }).map((n) => n / 1000 + 0.00037),
        fc.integer({ min: 0, max: 900 }).map((n) => n / 1000 + 0.0001),
        (max, minC, mass, width) => {
          const ranges = {
            C: [Math.min(minC, max.C), max.C],
            H: [0, max.H],
            N: [0, max.N],
            O: [0, max.O],
            S: [0, max.S]
          } as const;
          const space = formulaSpace(ranges);
          const found: string[] = [];
          forEachFormula(space, mass - width, mass + width, (counts) => {
            const of = (s: string) => counts[space.symbols.indexOf(s)] ?? 0;
            found.push(
              Object.keys(ranges)
                .map((s) => `${s}${of(s)}`)
                .join('')
            );
          });
          expect(found.sort()).toEqual(byLoops(ranges, mass - width, mass + width));
        }
      ),
      { numRuns: 60 }
    );
  });

  it('finds a formula in its own zero-width window', () => {
    const caffeine = parseFormula('C8H10N4O2');
    const hits = enumerateFormulas(monoisotopicMass(caffeine), 0, parseElementRanges('C60H120N10O20'));
    expect(hits.map((h) => h.formula)).toEqual(['C8H10N4O2']);
  });

  it('sorts by error and honours minimum, parity and ranges', () => {
    const hits = enumerateFormulas(302.042653, 0.01, parseElementRanges('C1-60H0-120N0-20O0-20'), {
      minDbe: 0,
      parity: 'whole'
    });
    const errors = hits.map((h) => Math.abs(h.errorPpm));
    expect(errors).toEqual([...errors].sort((a, b) => a - b));
    expect(hits.every((h) => h.dbe >= 0 && Number.isInteger(h.dbe) && (h.composition.C ?? 0) >= 1)).toBe(true);
  });
});

describe('sub-formulas of an ion', () => {
  it('are subsets within the window with possible valences', () => {
    const whole = parseFormula('C17H22NO4');
    const mz = ionMz(parseFormula('C10H16NO2'), 1);
    const hits = subformulas(whole, mz, 0.4, 1);
    expect(hits[0].formula).toBe('C10H16NO2');
    expect(hits.length).toBeGreaterThan(1);
    for (const hit of hits) {
      expect(isSubset(hit.composition, whole)).toBe(true);
      expect(Math.abs(hit.calculated - mz)).toBeLessThanOrEqual(0.4 + 1e-9);
      expect(dbe(hit.composition)).toBeGreaterThanOrEqual(-0.5);
    }
  });

  it('takes the charge of the product ion into account', () => {
    const whole = parseFormula('C20H32N4O4');
    const half = parseFormula('C16H24N2O2');
    expect(subformulas(whole, ionMz(half, 2), 0.0005, 2).map((h) => h.formula)).toContain('C16H24N2O2');
  });
});

describe('windows', () => {
  it('take the larger of ppm and mDa', () => {
    expect(windowAt({ ppm: 5, mda: 0.5 }, 50)).toBeCloseTo(0.0005, 9);
    expect(windowAt({ ppm: 5, mda: 0.5 }, 500)).toBeCloseTo(0.0025, 9);
  });

  it('are unit-wide for ion traps', () => expect(windowAt(toleranceFor('ion-trap'), 300)).toBeCloseTo(0.4, 9));
});

describe('chemical rules', () => {
  it('applies Senior to molecules', () => {
    expect(obeysSenior(parseFormula('C8H10N4O2'))).toBe(true);
    expect(obeysSenior(parseFormula('C2H7'))).toBe(false);
    expect(obeysSenior(parseFormula('C2H8'))).toBe(false);
  });

  // Kind & Fiehn, BMC Bioinformatics 8:105 (2007), table 3: two of the printed examples break the printed limits.
  it.each([
    ['C15H34N9O8PS', true],
    ['C22H44N4O14P2S2', false],
    ['C24H38N7O19P3S', true],
    ['C20H28N10O21P4', true],
    ['C16H36N4O4P2S2', false],
    ['C59H64N18O14S7', false]
  ])('joint limits on %s: %s', (formula, within) => expect(withinJointLimits(parseFormula(formula))).toBe(within));

  it('classes ratios and element maxima', () => {
    expect(ratioClass(parseFormula('C8H10N4O2'))).toBe('common');
    expect(ratioClass(parseFormula('C8HF15O2'))).toBe('extended');
    expect(ratioClass(parseFormula('C6Cl20'))).toBe('extreme');
    expect(ratioClass(parseFormula('H2O'))).toBe('extreme');
    expect(withinElementMaxima(parseFormula('C10H11N21'))).toBe(false);
  });
});
