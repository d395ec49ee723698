/**
 * Elements, their isotopes and usual valences.
 *
 * Masses in u: atomic mass evaluation AME2020 (Chinese Physics C 45, 030003, 2021).
 * Abundances as mole fractions: IUPAC isotopic compositions of the elements 2013 (Pure Appl. Chem. 88, 293, 2016).
 */

export interface Isotope {
  /** mass number. */
  nucleons: number;
  /** u */
  mass: number;
  /** mole fraction 0..1. */
  abundance: number;
}

export interface Element {
  symbol: string;
  /** the valence that ring-plus-double-bond counting uses. */
  valence: number;
  /** mass number of the most abundant isotope; not the lightest one for B, Se and Li. */
  principal: number;
  /** ascending mass number. */
  isotopes: readonly Isotope[];
}

/** Rest mass of the electron in u (CODATA 2018). */
export const ELECTRON_MASS = 0.000548579909065;

/** 13C minus 12C in u (AME2020): spacing of the isotope peaks of organic ions, times the charge number. */
export const CARBON_ISOTOPE_SPACING = 1.003354835;

type IsotopeRow = readonly [nucleons: number, mass: number, abundance: number];

const element = (symbol: string, valence: number, principal: number, rows: readonly IsotopeRow[]): Element => ({
  symbol,
  valence,
  principal,
  isotopes: rows.map(([nucleons, mass, abundance]) => ({ nucleons, mass, abundance }))
});

// prettier-ignore
const ELEMENT_LIST: readonly Element[] = [
  element('H', 1, 1, [[1, 1.007825031898, 0.999885], [2, 2.014101777844, 0.000115]]),
  element('C', 4, 12, [[12, 12.0, 0.9893], [13, 13.00335483534, 0.0107]]),
  element('N', 3, 14, [[14, 14.00307400425, 0.99636], [15, 15.00010889827, 0.00364]]),
  element('O', 2, 16, [[16, 15.99491461926, 0.99757], [17, 16.99913175595, 0.00038], [18, 17.99915961214, 0.00205]]),
  element('P', 3, 31, [[31, 30.97376199768, 1.0]]),
  element('S', 2, 32, [[32, 31.97207117354, 0.9499], [33, 32.97145890862, 0.0075], [34, 33.967867011, 0.0425], [36, 35.967080692, 0.0001]]),
  element('F', 1, 19, [[19, 18.99840316207, 1.0]]),
  element('Cl', 1, 35, [[35, 34.968852694, 0.7576], [37, 36.965902573, 0.2424]]),
  element('Br', 1, 79, [[79, 78.918337574, 0.5069], [81, 80.916288197, 0.4931]]),
  element('I', 1, 127, [[127, 126.904472592, 1.0]]),
  element('Na', 1, 23, [[23, 22.98976928195, 1.0]]),
  element('K', 1, 39, [[39, 38.96370648482, 0.932581], [40, 39.963998165, 0.000117], [41, 40.96182525611, 0.067302]]),
  element('Si', 4, 28, [[28, 27.97692653442, 0.92223], [29, 28.97649466434, 0.04685], [30, 29.973770137, 0.03092]]),
  element('B', 3, 11, [[10, 10.012936862, 0.199], [11, 11.009305166, 0.801]]),
  element('Se', 2, 80, [[74, 73.922475933, 0.0089], [76, 75.919213702, 0.0937], [77, 76.91991415, 0.0763], [78, 77.917309244, 0.2377], [80, 79.916521761, 0.4961], [82, 81.916699531, 0.0873]]),
  element('Li', 1, 7, [[6, 6.01512288742, 0.0759], [7, 7.01600343426, 0.9241]])
];

const ELEMENTS: ReadonlyMap<string, Element> = new Map(ELEMENT_LIST.map((item) => [item.symbol, item]));

/** Symbols of all known elements, alphabetical. */
export const ELEMENT_SYMBOLS: readonly string[] = [...ELEMENTS.keys()].sort();

const MONOISOTOPIC: ReadonlyMap<string, number> = new Map(
  ELEMENT_LIST.map((item) => [item.symbol, item.isotopes.find((i) => i.nucleons === item.principal)?.mass ?? NaN])
);

/** The element of a symbol, or undefined when the table does not hold it. */
export function elementOf(symbol: string): Element | undefined {
  return ELEMENTS.get(symbol);
}

/** Mass in u of an element's most abundant isotope; NaN for an unknown symbol. */
export function elementMass(symbol: string): number {
  return MONOISOTOPIC.get(symbol) ?? NaN;
}

/** Usual valence of an element; 0 for an unknown symbol. */
export function valenceOf(symbol: string): number {
  return ELEMENTS.get(symbol)?.valence ?? 0;
}
