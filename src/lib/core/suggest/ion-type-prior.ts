/**
 * How usual an ion type is, log odds against the protonated or deprotonated molecule (common practice in electrospray
 * and at atmospheric pressure). Ion types that give the same ion composition explain every product ion alike, so that
 * only this tells them apart until a person or a pair of adduct ions in MS1 does.
 */
const LOG_ODDS: Readonly<Record<string, number>> = {
  '[M+H]+': 0,
  '[M+Na]+': -1.2,
  '[M]+•': -1.5,
  '[M+NH4]+': -2,
  '[M+K]+': -2.5,
  '[M+H-H2O]+': -2.5,
  '[M]+': -3,
  '[M+2H]2+': 0,
  '[M+3H]3+': 0,
  '[M+H+Na]2+': -1.5,
  '[M+H+NH4]2+': -2.5,
  '[M+H+K]2+': -2.5,
  '[M+2Na]2+': -3,
  '[M-H]-': 0,
  '[M-2H]2-': 0,
  '[M-3H]3-': 0,
  '[M+HCOO]-': -1.5,
  '[M+CH3COO]-': -2,
  '[M+Cl]-': -2,
  '[M]-•': -2
};
const OTHERS = -3.5;

/** @param name of the ion type, e.g. "[M+Na]+" */
export const ionTypeLogOdds = (name: string): number => LOG_ODDS[name] ?? OTHERS;
