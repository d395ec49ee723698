import { MF } from 'mf-parser';
import { describe, expect, it } from 'vitest';
import { ionFormulaOf, ionMz, monoisotopicMass, parseAdduct, parseFormula } from '../../src/lib/core/chem';

/**
 * Check molecules: monoisotopic masses and ion m/z computed from the AME2020 atomic mass evaluation (Chinese Physics
 * C 45, 030003, 2021) and the CODATA electron mass.
 */
// prettier-ignore
const MOLECULES: readonly (readonly [name: string, formula: string, mass: number, protonated: number, sodiated: number, deprotonated: number])[] = [
  ['caffeine', 'C8H10N4O2', 194.080376, 195.08765, 217.0696, 193.0731],
  ['quercetin', 'C15H10O7', 302.042653, 303.04993, 325.03187, 301.03538],
  ['reserpine', 'C33H40N2O9', 608.273381, 609.28066, 631.2626, 607.2661],
  ['erythromycin A', 'C37H67NO13', 733.461241, 734.46852, 756.45046, 732.45396],
  ['chloramphenicol', 'C11H12Cl2N2O5', 322.012327, 323.0196, 345.00155, 321.00505],
  ['sucrose', 'C12H22O11', 342.116212, 343.12349, 365.10543, 341.10894],
  ['glutathione', 'C10H17N3O6S', 307.083806, 308.09108, 330.07303, 306.07653],
  ['cholesterol', 'C27H46O', 386.354866, 387.36214, 409.34409, 385.34759],
  ['chlorpyrifos', 'C9H11Cl3NO3PS', 348.926284, 349.93356, 371.91551, 347.91901],
  ['bromazepam', 'C14H10BrN3O', 315.000725, 316.008, 337.98995, 313.99345],
  ['riboflavin', 'C17H20N4O6', 376.138284, 377.14556, 399.12751, 375.13101],
  ['tetracycline', 'C22H24N2O8', 444.153266, 445.16054, 467.14249, 443.14599],
  ['cocaine', 'C17H21NO4', 303.147058, 304.15433, 326.13628, 302.13978],
  ['ampicillin', 'C16H19N3O4S', 349.109627, 350.1169, 372.09885, 348.10235],
  ['sulfamethoxazole', 'C10H11N3O3S', 253.052112, 254.05939, 276.04133, 252.04484],
  ['rutin', 'C27H30O16', 610.153385, 611.16066, 633.14261, 609.14611]
];

const mzOf = (formula: string, adduct: string): number => {
  const type = parseAdduct(adduct);
  return ionMz(ionFormulaOf(parseFormula(formula), type) ?? {}, type.charge);
};

describe('check molecules', () => {
  it.each(MOLECULES)('%s %s', (_name, formula, mass, protonated, sodiated, deprotonated) => {
    expect(Math.abs(monoisotopicMass(parseFormula(formula)) - mass)).toBeLessThan(1e-5);
    expect(Math.abs(mzOf(formula, '[M+H]+') - protonated)).toBeLessThan(1e-5);
    expect(Math.abs(mzOf(formula, '[M+Na]+') - sodiated)).toBeLessThan(1e-5);
    expect(Math.abs(mzOf(formula, '[M-H]-') - deprotonated)).toBeLessThan(1e-5);
  });

  // npm mf-parser holds its own table of masses; it counts no electrons.
  it.each(MOLECULES)('%s %s agrees with an independent library', (_name, formula) => {
    expect(Math.abs(monoisotopicMass(parseFormula(formula)) - new MF(formula).getInfo().monoisotopicMass)).toBeLessThan(
      2e-6
    );
  });
});
