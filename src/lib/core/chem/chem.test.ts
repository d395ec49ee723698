import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { CoreError } from '../errors';
import {
  ADDUCTS,
  add,
  adductMz,
  dbe,
  ELEMENT_SYMBOLS,
  formatElementRanges,
  formatFormula,
  ionFormulaOf,
  ionMz,
  isImplausibleLoss,
  isOddElectron,
  isSubset,
  lossKind,
  monoisotopicMass,
  nameLoss,
  neutralFormulaOf,
  neutralMassOf,
  nominalMass,
  nucleiMass,
  parseAdduct,
  parseElementRanges,
  parseFormula,
  subtract,
  usualAdducts
} from './index';

const composition = fc
  .dictionary(fc.constantFrom(...ELEMENT_SYMBOLS), fc.integer({ min: 1, max: 60 }), { minKeys: 1 })
  .map((counts) => ({ ...counts }));

const codeOf = (act: () => unknown): string | null => {
  try {
    act();
    return null;
  } catch (error) {
    return error instanceof CoreError ? error.code : 'other';
  }
};

describe('formulas', () => {
  it('reads what it writes', () => {
    fc.assert(
      fc.property(composition, (c) => {
        expect(parseFormula(formatFormula(c))).toEqual(c);
      })
    );
  });

  it('writes Hill order: carbon, hydrogen, then the alphabet; the alphabet alone without carbon', () => {
    expect(formatFormula({ O: 5, Cl: 2, N: 2, H: 12, C: 11 })).toBe('C11H12Cl2N2O5');
    expect(formatFormula({ O: 4, H: 3, P: 1 })).toBe('H3O4P');
  });

  it('reads brackets', () => {
    expect(formatFormula(parseFormula('CH3(CH2)4OH'))).toBe('C5H12O');
    expect(formatFormula(parseFormula('Si(CH3)4'))).toBe('C4H12Si');
  });

  it.each([
    ['', 1],
    ['C6H6X', 5],
    ['C6h6', 3],
    ['C6H6+', 5],
    ['(CH3', 5],
    ['CH3)', 4],
    ['C99999', 1]
  ])('refuses %j and says where (character %i)', (text, position) => {
    expect(codeOf(() => parseFormula(text))).toBe('bad-formula');
    expect(() => parseFormula(text)).toThrow(`character ${position}`);
  });

  it('adds and subtracts as inverses', () => {
    fc.assert(
      fc.property(composition, composition, (a, b) => {
        const sum = add(a, b);
        expect(subtract(sum, b)).toEqual(a);
        expect(isSubset(a, sum)).toBe(true);
        expect(monoisotopicMass(sum)).toBeCloseTo(monoisotopicMass(a) + monoisotopicMass(b), 6);
      })
    );
  });

  it('turns an m/z back into the mass of the nuclei', () => {
    fc.assert(
      fc.property(composition, fc.constantFrom(-3, -2, -1, 1, 2, 3), (c, z) => {
        expect(nucleiMass(ionMz(c, z), z)).toBeCloseTo(monoisotopicMass(c), 6);
      })
    );
  });

  it('counts nominal masses of the most abundant isotopes', () => {
    expect(nominalMass(parseFormula('C8H10N4O2'))).toBe(194);
    expect(nominalMass(parseFormula('BSe'))).toBe(91);
  });
});

describe('rings plus double bonds', () => {
  // Textbook counting with lowest valences (IUPAC 2013, ring-plus-double-bond concept).
  it.each([
    ['C8H10N4O2', 6],
    ['C15H10O7', 11],
    ['C33H40N2O9', 15],
    ['C27H46O', 5],
    ['C2H6OS', 0],
    ['C6H5NO2', 5],
    ['C6H7', 3.5],
    ['H4N', -0.5]
  ])('%s has %d', (formula, bonds) => expect(dbe(parseFormula(formula))).toBe(bonds));

  it('tells odd-electron from even-electron ions, also of two charges', () => {
    expect(isOddElectron(parseFormula('C6H6'))).toBe(true);
    expect(isOddElectron(parseFormula('C6H7'))).toBe(false);
    expect(isOddElectron(parseFormula('C8H12N4O2'), 2)).toBe(false);
  });
});

describe('element ranges', () => {
  it('reads ranges, maxima and single atoms', () => {
    expect(parseElementRanges('C0-60 H1-120, N10 S')).toEqual({ C: [0, 60], H: [1, 120], N: [0, 10], S: [0, 1] });
  });

  it('writes what it reads', () => {
    const text = 'C0-60H0-120Cl1-4';
    expect(formatElementRanges(parseElementRanges(text))).toBe(text);
  });

  it.each(['', 'C0-', 'C5-2', 'Xx3', 'C1C2', '5C', 'C0-5000'])('refuses %j', (text) => {
    expect(codeOf(() => parseElementRanges(text))).toBe('bad-elements');
  });
});

describe('ion types', () => {
  // Mass shifts computed from AME2020 masses and the electron mass; caffeine is an arithmetic example.
  it.each([
    ['[M+H]+', 195.08765],
    ['[M+Na]+', 217.0696],
    ['[M+NH4]+', 212.1142],
    ['[M+2H]2+', 98.04746],
    ['[2M+H]+', 389.16803],
    ['[M]+•', 194.07983],
    ['[M-H]-', 193.0731],
    ['[M+HCOO]-', 239.07858],
    ['[M+CH3COO]-', 253.09423],
    ['[M-2H]2-', 96.03291],
    ['[M-CH3]-', 179.05745]
  ])('%s of caffeine has m/z %d', (name, mz) => {
    const neutral = parseFormula('C8H10N4O2');
    const adduct = parseAdduct(name);
    const ion = ionFormulaOf(neutral, adduct);
    expect(ion).not.toBeNull();
    expect(ionMz(ion ?? {}, adduct.charge)).toBeCloseTo(mz, 4);
    expect(adductMz(monoisotopicMass(neutral), adduct)).toBeCloseTo(mz, 4);
  });

  it.each([
    ['M+.', '[M]+•'],
    ['[M]+*', '[M]+•'],
    ['[M]+', '[M]+'],
    ['M+H+', '[M+H]+'],
    ['[M+H]1+', '[M+H]+'],
    ['[M+2H]+2', '[M+2H]2+'],
    ['[M−H]−', '[M-H]-'],
    ['[M+FA-H]-', '[M+HCOO]-'],
    ['[M-H2O+H]+', '[M+H-H2O]+'],
    ['M-.', '[M]-•']
  ])('reads %s as %s', (written, name) => expect(parseAdduct(written).name).toBe(name));

  it.each(['', 'H+', '[M+H]', '[M+Xx]+', '[0M+H]+', '[M+H]99+', '[M+?]+'])('refuses %j', (name) => {
    expect(codeOf(() => parseAdduct(name))).toBe('bad-adduct');
  });

  it('reads back the name of every known ion type', () => {
    for (const adduct of ADDUCTS) expect(parseAdduct(adduct.name)).toEqual(adduct);
  });

  it('goes from neutral to ion and back', () => {
    const neutral = parseFormula('C12H15ClO6P');
    for (const adduct of ADDUCTS) {
      const ion = ionFormulaOf(neutral, adduct);
      if (!ion) continue;
      expect(neutralFormulaOf(ion, adduct)).toEqual(neutral);
      expect(neutralMassOf(ionMz(ion, adduct.charge), adduct)).toBeCloseTo(monoisotopicMass(neutral), 6);
    }
    expect(ADDUCTS.length).toBeGreaterThan(50);
  });

  it('gives no ion when the atoms to lose are missing', () => {
    expect(ionFormulaOf(parseFormula('C6Cl6'), parseAdduct('[M-H]-'))).toBeNull();
    expect(neutralFormulaOf(parseFormula('C6H6'), parseAdduct('[M+Na]+'))).toBeNull();
  });

  it('offers radical cations for APCI but not for ESI, and only singly charged ions for MALDI', () => {
    const names = (...args: Parameters<typeof usualAdducts>) => usualAdducts(...args).map((a) => a.name);
    expect(names('APCI', 'positive')).toContain('[M]+•');
    expect(names('ESI', 'positive')).not.toContain('[M]+•');
    expect(names('unknown', 'negative')[0]).toBe('[M-H]-');
    expect(usualAdducts('MALDI', 'positive', 2)).toEqual([]);
  });
});

describe('losses', () => {
  it('names common losses and falls back to the formula', () => {
    expect(nameLoss('H3N')).toBe('NH3');
    expect(nameLoss('CH3')).toBe('CH3•');
    expect(nameLoss('C6H10O5')).toBe('hexose residue');
    expect(nameLoss('C17H3', true)).toBe('C17H3•');
  });

  it.each([
    ['H2O', 'common'],
    ['CO', 'common'],
    ['CH3', 'radical'],
    ['C', 'implausible'],
    ['CH2', 'implausible'],
    ['H4', 'implausible'],
    ['C7H6O3', 'other']
  ])('%s is %s', (formula, kind) => expect(lossKind(parseFormula(formula))).toBe(kind));

  it('does not call CO2, HCN, N2 or O2 implausible', () => {
    for (const formula of ['CO2', 'CHN', 'N2', 'O2', 'H2', 'CH4'])
      expect(isImplausibleLoss(parseFormula(formula))).toBe(false);
  });
});
