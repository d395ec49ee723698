/**
 * Neutral and radical losses of product ions: common ones with a display name, and how plausible any loss is.
 *
 * The list joins the losses of the open specification mzPAF 1.0.1 (section 4.5) and of PSI-MS MS:1002812 ('listed')
 * with losses seen in open records or textbooks ('seen') and common practice ('practice').
 */
import { type Composition } from '../model';
import { formatFormula, isRadical } from './composition';

export type LossEvidence = 'listed' | 'seen' | 'practice';

export interface Loss {
  /** Hill order. */
  formula: string;
  /** for display, e.g. "NH3", "CH3•", "hexose residue". */
  name: string;
  radical: boolean;
  evidence: LossEvidence;
}

type LossRow = readonly [formula: string, name: string, radical: boolean, evidence: LossEvidence];

// prettier-ignore
const ROWS: readonly LossRow[] = [
  ['H', 'H•', true, 'practice'],
  ['H2', 'H2', false, 'practice'],
  ['CH3', 'CH3•', true, 'seen'],
  ['CH4', 'CH4', false, 'listed'],
  ['HO', 'OH•', true, 'seen'],
  ['H3N', 'NH3', false, 'listed'],
  ['H2O', 'H2O', false, 'listed'],
  ['F', 'F•', true, 'practice'],
  ['FH', 'HF', false, 'seen'],
  ['CN', 'CN•', true, 'practice'],
  ['C2H2', 'C2H2', false, 'seen'],
  ['CHN', 'HCN', false, 'seen'],
  ['CO', 'CO', false, 'listed'],
  ['N2', 'N2', false, 'seen'],
  ['C2H4', 'C2H4', false, 'listed'],
  ['CHO', 'CHO•', true, 'practice'],
  ['C2H5', 'C2H5•', true, 'practice'],
  ['NO', 'NO•', true, 'seen'],
  ['CH2O', 'CH2O', false, 'seen'],
  ['HNO', 'HNO', false, 'practice'],
  ['CH3O', 'CH3O•', true, 'seen'],
  ['CH5N', 'CH3NH2', false, 'seen'],
  ['O2', 'O2', false, 'practice'],
  ['CH4O', 'CH3OH', false, 'seen'],
  ['HS', 'HS•', true, 'seen'],
  ['H2S', 'H2S', false, 'seen'],
  ['Cl', 'Cl•', true, 'seen'],
  ['ClH', 'HCl', false, 'seen'],
  ['H4O2', '2 H2O', false, 'seen'],
  ['C3H4', 'C3H4', false, 'practice'],
  ['C2H2O', 'ketene', false, 'listed'],
  ['C3H6', 'C3H6', false, 'seen'],
  ['CHNO', 'HNCO', false, 'seen'],
  ['C2H3O', 'CH3CO•', true, 'practice'],
  ['C2H5N', 'CH2=NCH3', false, 'seen'],
  ['C3H7', 'C3H7•', true, 'practice'],
  ['CS', 'CS', false, 'practice'],
  ['CO2', 'CO2', false, 'listed'],
  ['N2O', 'N2O', false, 'practice'],
  ['CH2NO', 'CONH2•', true, 'practice'],
  ['C2H4O', 'CH3CHO', false, 'seen'],
  ['CH3NO', 'HCONH2', false, 'listed'],
  ['C2H5O', 'C2H5O•', true, 'practice'],
  ['C2H7N', 'HN(CH3)2', false, 'seen'],
  ['NO2', 'NO2•', true, 'seen'],
  ['CH2O2', 'HCOOH', false, 'listed'],
  ['C2H6O', 'C2H5OH', false, 'seen'],
  ['HNO2', 'HNO2', false, 'seen'],
  ['OS', 'SO', false, 'seen'],
  ['CH4S', 'CH3SH', false, 'seen'],
  ['CH3Cl', 'CH3Cl', false, 'practice'],
  ['CF2', 'CF2', false, 'seen'],
  ['CHF2', 'CHF2•', true, 'practice'],
  ['C4H8', 'C4H8', false, 'listed'],
  ['C2H3NO', 'CH3NCO', false, 'seen'],
  ['C4H9', 'C4H9•', true, 'practice'],
  ['C3H6O', 'acetone', false, 'seen'],
  ['C3H9N', 'C3H9N (isopropyl- or trimethylamine)', false, 'seen'],
  ['COS', 'COS', false, 'seen'],
  ['C2H4O2', 'CH3COOH', false, 'seen'],
  ['S2', 'S2', false, 'practice'],
  ['O2S', 'SO2', false, 'seen'],
  ['HO2P', 'HPO2', false, 'practice'],
  ['CH4OS', 'CH3SOH', false, 'listed'],
  ['CH4O3', 'HCOOH + H2O', false, 'seen'],
  ['C5H8', 'C5H8', false, 'seen'],
  ['CF3', 'CF3•', true, 'practice'],
  ['C4H11N', 'HN(C2H5)2', false, 'seen'],
  ['C3H6O2', 'methyl acetate or propionic acid', false, 'seen'],
  ['Br', 'Br•', true, 'seen'],
  ['BrH', 'HBr', false, 'seen'],
  ['O3S', 'SO3', false, 'listed'],
  ['HO3P', 'HPO3', false, 'listed'],
  ['C3H2O3', 'CO2 + ketene', false, 'listed'],
  ['C3H6O3', 'C-hexoside cross-ring C3H6O3', false, 'seen'],
  ['C3H10OSi', 'trimethylsilanol', false, 'seen'],
  ['H2O4S', 'H2SO4', false, 'seen'],
  ['H3O4P', 'H3PO4', false, 'listed'],
  ['C4H8O4', 'C-hexoside cross-ring C4H8O4', false, 'seen'],
  ['C7H6O2', 'benzoic acid', false, 'seen'],
  ['I', 'I•', true, 'seen'],
  ['HI', 'HI', false, 'seen'],
  ['C5H7NO3', 'γ-glutamyl residue', false, 'seen'],
  ['C5H8O4', 'pentose residue', false, 'listed'],
  ['C8H6O2', 'flavone ring-B fragment C8H6O2', false, 'seen'],
  ['C6H10O4', 'deoxyhexose residue', false, 'listed'],
  ['C8H6O3', 'flavone ring-B fragment C8H6O3', false, 'seen'],
  ['C8H14O3', 'cladinose residue', false, 'seen'],
  ['C9H6O3', 'caffeoyl residue', false, 'seen'],
  ['C6H10O5', 'hexose residue', false, 'listed'],
  ['C6H8O6', 'hexuronic acid residue', false, 'listed'],
  ['C10H8O3', 'feruloyl residue', false, 'seen'],
  ['C6H12O6', 'hexose', false, 'seen'],
  ['C8H13NO5', 'N-acetylhexosamine residue', false, 'seen'],
  ['C11H17NO8', 'sialic acid residue', false, 'seen'],
  ['C10H17N3O6S', 'glutathione', false, 'seen'],
  ['C12H20O9', 'rutinose residue', false, 'seen'],
  ['C12H20O10', 'two hexose residues', false, 'seen']
];

/** The common losses, ascending mass. */
export const LOSSES: readonly Loss[] = ROWS.map(([formula, name, radical, evidence]) => ({
  formula,
  name,
  radical,
  evidence
}));

const BY_FORMULA: ReadonlyMap<string, Loss> = new Map(LOSSES.map((loss) => [loss.formula, loss]));

/** The common loss of this Hill-order formula, if it is one. */
export function commonLoss(formula: string): Loss | undefined {
  return BY_FORMULA.get(formula);
}

/** What to call a loss on screen: its common name, else the formula itself with • for radicals. */
export function nameLoss(formula: string, radical = false): string {
  return BY_FORMULA.get(formula)?.name ?? (radical ? `${formula}•` : formula);
}

export type LossKind = 'common' | 'radical' | 'implausible' | 'other';

/** Losses that no known mechanism gives: a bare carbon or nitrogen count, a lone CH2, hydrogen beyond H2. */
export function isImplausibleLoss(loss: Composition): boolean {
  const elements = Object.keys(loss);
  const { C = 0, H = 0, N = 0, O = 0 } = loss;
  if (elements.every((e) => e === 'C' || e === 'O')) return C > 0 ? C > O : O !== 2;
  if (elements.every((e) => e === 'C' || e === 'N')) return !(C === 0 && N === 2) && !(C === 1 && N === 1);
  if (elements.length === 1 && H > 0) return H > 2;
  return elements.every((e) => e === 'C' || e === 'H') && C === 1 && H < 3;
}

/** Kind of a loss from one ion to the next. Common radical losses count as 'radical' too; see `commonLoss`. */
export function lossKind(loss: Composition): LossKind {
  if (isImplausibleLoss(loss)) return 'implausible';
  if (isRadical(loss)) return 'radical';
  return BY_FORMULA.has(formatFormula(loss)) ? 'common' : 'other';
}
