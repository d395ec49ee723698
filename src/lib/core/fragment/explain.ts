import { parseFormula } from '../chem';
import { heavyKey, type Disconnection, type Part } from './disconnect';
import { within, type AtomSet } from './graph';

/** One way in which the structure can give an ion formula. */
export interface Explanation {
  atoms: AtomSet;
  /** broken-bond penalties plus the penalty of the hydrogen shift. */
  cost: number;
  brokenBonds: number;
  /** hydrogens of the ion less those of the kept atoms; the charging proton counts as one of them. */
  hydrogenShift: number;
}

const H_PENALTY = 0.2;

/** Parts by heavy-atom composition: what every ion of a structure is looked up in. */
export function indexParts(disconnection: Disconnection): Map<string, Part[]> {
  const index = new Map<string, Part[]>();
  for (const part of disconnection.parts.values()) {
    const list = index.get(part.key);
    if (list) list.push(part);
    else index.set(part.key, [part]);
  }
  return index;
}

/**
 * Atom sets of least cost that give an ion formula; ties are kept, since symmetric parts are real.
 * A part may gain or lose as many hydrogens as bonds were broken, and one more for the charge.
 * @param ionFormula all nuclei of the ion, without metals of an adduct
 * @param inside only parts within one of these atom sets (the measured precursor ion's), or null
 */
export function explainIon(
  index: ReadonlyMap<string, Part[]>,
  ionFormula: string,
  inside: readonly AtomSet[] | null
): Explanation[] {
  const counts = parseFormula(ionFormula);
  const hydrogens = counts.H ?? 0;
  let best: Explanation[] = [];
  for (const part of index.get(heavyKey(counts)) ?? []) {
    const shift = hydrogens - part.hydrogens;
    if (Math.abs(shift) > part.brokenBonds + 1) continue;
    if (inside && !inside.some((outer) => within(part.atoms, outer))) continue;
    // The charging proton (or its loss) is free; what goes beyond costs.
    const cost = part.cost + H_PENALTY * Math.max(0, Math.abs(shift) - 1);
    if (best.length && cost > best[0].cost + 1e-9) continue;
    const found = { atoms: part.atoms, cost, brokenBonds: part.brokenBonds, hydrogenShift: shift };
    best = best.length && cost < best[0].cost - 1e-9 ? [found] : [...best, found];
  }
  return best.sort((x, y) => (x.atoms < y.atoms ? -1 : x.atoms > y.atoms ? 1 : 0));
}
