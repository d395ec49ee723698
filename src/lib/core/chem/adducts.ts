import { type Composition, type Polarity, type SourceKind } from '../model';
import { parseFormula, add, isSubset, ionMz, monoisotopicMass, nucleiMass, subtract } from './composition';

/** How an ion is made from the neutral molecule M: n·M + gain − loss, with a signed charge number. */
export interface Adduct {
  /** e.g. "[M+H]+"; radical cations are "[M]+•", pre-charged cations "[M]+". */
  name: string;
  /** number of molecules M in the ion. */
  molecules: number;
  gain: Composition;
  loss: Composition;
  /** signed charge number. */
  charge: number;
  /** true for ions with an unpaired electron when M is a closed-shell neutral. */
  oddElectron: boolean;
  /** ion sources that commonly give it. */
  sources: readonly SourceKind[];
}

type AdductRow = readonly [name: string, n: number, gain: string, loss: string, charge: number, sources: string];

// Adduct ions named after the IUPAC 2013 recommendations (Pure Appl. Chem. 85, 1515); sources: common practice.
// prettier-ignore
const ROWS: readonly AdductRow[] = [
  ['[M+H]+', 1, 'H', '', 1, 'ESI APCI APPI MALDI CI'],
  ['[M+Na]+', 1, 'Na', '', 1, 'ESI MALDI'],
  ['[M+K]+', 1, 'K', '', 1, 'ESI MALDI'],
  ['[M+Li]+', 1, 'Li', '', 1, ''],
  ['[M+NH4]+', 1, 'H4N', '', 1, 'ESI APCI CI'],
  ['[M+2Na-H]+', 1, 'Na2', 'H', 1, ''],
  ['[M+K+Na-H]+', 1, 'KNa', 'H', 1, ''],
  ['[M+2K-H]+', 1, 'K2', 'H', 1, ''],
  ['[M+H-H2O]+', 1, 'H', 'H2O', 1, 'ESI APCI'],
  ['[M+H-2H2O]+', 1, 'H', 'H4O2', 1, ''],
  ['[M+H-NH3]+', 1, 'H', 'H3N', 1, ''],
  ['[M+CH3OH+H]+', 1, 'CH5O', '', 1, ''],
  ['[M+ACN+H]+', 1, 'C2H4N', '', 1, ''],
  ['[M+ACN+Na]+', 1, 'C2H3NNa', '', 1, ''],
  ['[M+2ACN+H]+', 1, 'C4H7N2', '', 1, ''],
  ['[M+C2H8N]+', 1, 'C2H8N', '', 1, ''],
  ['[M+C6H16N]+', 1, 'C6H16N', '', 1, ''],
  ['[M+H3O]+', 1, 'H3O', '', 1, ''],
  ['[M]+•', 1, '', '', 1, 'APCI APPI MALDI EI CI'],
  ['[M-H]+', 1, '', 'H', 1, ''],
  ['[M]+', 1, '', '', 1, 'ESI MALDI'],
  ['[M+2H]2+', 1, 'H2', '', 2, 'ESI'],
  ['[M+3H]3+', 1, 'H3', '', 3, 'ESI'],
  ['[M+H+Na]2+', 1, 'HNa', '', 2, 'ESI'],
  ['[M+H+NH4]2+', 1, 'H5N', '', 2, 'ESI'],
  ['[M+H+K]2+', 1, 'HK', '', 2, 'ESI'],
  ['[M+2Na]2+', 1, 'Na2', '', 2, 'ESI'],
  ['[2M+H]+', 2, 'H', '', 1, ''],
  ['[2M+Na]+', 2, 'Na', '', 1, ''],
  ['[2M+K]+', 2, 'K', '', 1, ''],
  ['[2M+NH4]+', 2, 'H4N', '', 1, ''],
  ['[3M+H]+', 3, 'H', '', 1, ''],
  ['[3M+Na]+', 3, 'Na', '', 1, ''],
  ['[2M+3H]3+', 2, 'H3', '', 3, ''],
  ['[M-H]-', 1, '', 'H', -1, 'ESI APCI APPI MALDI CI'],
  ['[M+Cl]-', 1, 'Cl', '', -1, 'ESI APCI'],
  ['[M+Br]-', 1, 'Br', '', -1, ''],
  ['[M+HCOO]-', 1, 'CHO2', '', -1, 'ESI'],
  ['[M+CH3COO]-', 1, 'C2H3O2', '', -1, 'ESI'],
  ['[M+CF3COO]-', 1, 'C2F3O2', '', -1, ''],
  ['[M+NO3]-', 1, 'NO3', '', -1, ''],
  ['[M+HSO4]-', 1, 'HO4S', '', -1, ''],
  ['[M+H2PO4]-', 1, 'H2O4P', '', -1, ''],
  ['[M+O2]-•', 1, 'O2', '', -1, ''],
  ['[M]-•', 1, '', '', -1, 'APCI APPI MALDI'],
  ['[M-H2O-H]-', 1, '', 'H3O', -1, ''],
  ['[M-Cl+O]-', 1, 'O', 'Cl', -1, ''],
  ['[M+Na-2H]-', 1, 'Na', 'H2', -1, ''],
  ['[M+K-2H]-', 1, 'K', 'H2', -1, ''],
  ['[M-2H]2-', 1, '', 'H2', -2, 'ESI'],
  ['[M-3H]3-', 1, '', 'H3', -3, 'ESI'],
  ['[2M-H]-', 2, '', 'H', -1, ''],
  ['[2M+HCOO]-', 2, 'CHO2', '', -1, ''],
  ['[2M+CH3COO]-', 2, 'C2H3O2', '', -1, ''],
  ['[2M+Cl]-', 2, 'Cl', '', -1, ''],
  ['[3M-H]-', 3, '', 'H', -1, ''],
  ['[M-CH3]-', 1, '', 'CH3', -1, '']
];

const isSource = (text: string): text is SourceKind => text !== '';

/** Every adduct that has a common name, most usual first within each polarity. */
export const ADDUCTS: readonly Adduct[] = ROWS.map(([name, molecules, gain, loss, charge, sources]) => ({
  name,
  molecules,
  gain: gain === '' ? {} : parseFormula(gain),
  loss: loss === '' ? {} : parseFormula(loss),
  charge,
  oddElectron: name.endsWith('•'),
  sources: sources.split(' ').filter(isSource)
}));

/**
 * The ion types worth trying when nobody names one. For an unknown source those of electrospray are taken.
 * MALDI gives singly charged ions only.
 * @param charge charge number (positive) to which the list is limited
 */
export function usualAdducts(source: SourceKind, polarity: Polarity, charge = 1): Adduct[] {
  const effective: SourceKind = source === 'unknown' ? 'ESI' : source;
  const sign = polarity === 'positive' ? 1 : -1;
  return ADDUCTS.filter((a) => a.sources.includes(effective) && a.charge === sign * charge);
}

/** Composition of all nuclei of the ion that `adduct` makes of the neutral M; null when M lacks the atoms lost. */
export function ionFormulaOf(neutral: Composition, adduct: Adduct): Composition | null {
  const whole = add(add({}, neutral, adduct.molecules), adduct.gain);
  return isSubset(adduct.loss, whole) ? subtract(whole, adduct.loss) : null;
}

/** The neutral M of an ion composition; null when the ion cannot be such an adduct. */
export function neutralFormulaOf(ion: Composition, adduct: Adduct): Composition | null {
  const whole = add(ion, adduct.loss);
  if (!isSubset(adduct.gain, whole)) return null;
  const rest = subtract(whole, adduct.gain);
  const counts = Object.entries(rest).map(([symbol, n]) => [symbol, n / adduct.molecules] as const);
  return counts.every(([, n]) => Number.isInteger(n)) ? Object.fromEntries(counts) : null;
}

/** Mass of gain − loss in u, without electrons. */
export function adductMassShift(adduct: Adduct): number {
  return monoisotopicMass(adduct.gain) - monoisotopicMass(adduct.loss);
}

/** Neutral monoisotopic mass of M in u for an ion of this m/z. */
export function neutralMassOf(mz: number, adduct: Adduct): number {
  return (nucleiMass(mz, adduct.charge) - adductMassShift(adduct)) / adduct.molecules;
}

/** m/z of the ion that `adduct` makes of a neutral of this mass in u. */
export function adductMz(neutralMass: number, adduct: Adduct): number {
  return (
    adduct.molecules * (neutralMass / Math.abs(adduct.charge)) +
    ionMz(adduct.gain, adduct.charge) -
    monoisotopicMass(adduct.loss) / Math.abs(adduct.charge)
  );
}
