import { elementMass } from '../chem/elements';
import { type Composition, type ElementRanges } from '../model';

/**
 * Search space over a fixed list of elements. `symbols[0]` is C and `symbols[1]` is H, always present (perhaps with
 * a maximum of 0); the hetero elements follow in order of falling mass.
 */
export interface FormulaSpace {
  symbols: readonly string[];
  masses: Float64Array;
  min: Int32Array;
  max: Int32Array;
}

/** Turns element ranges into the ordered form that the search needs. */
export function formulaSpace(ranges: ElementRanges): FormulaSpace {
  const hetero = Object.keys(ranges).filter((s) => s !== 'C' && s !== 'H' && ranges[s][1] > 0);
  hetero.sort((a, b) => elementMass(b) - elementMass(a));
  const symbols = ['C', 'H', ...hetero];
  return {
    symbols,
    masses: Float64Array.from(symbols, elementMass),
    min: Int32Array.from(symbols, (s) => ranges[s]?.[0] ?? 0),
    max: Int32Array.from(symbols, (s) => ranges[s]?.[1] ?? 0)
  };
}

/** The space of all sub-formulas of a composition. */
export function subformulaSpace(whole: Composition): FormulaSpace {
  return formulaSpace(Object.fromEntries(Object.keys(whole).map((s) => [s, [0, whole[s]] as const])));
}

/** Counts in the order of a space's symbols as a composition. */
export function toComposition(space: FormulaSpace, counts: ArrayLike<number>): Composition {
  const composition: Record<string, number> = {};
  space.symbols.forEach((symbol, i) => {
    if (counts[i] > 0) composition[symbol] = counts[i];
  });
  return composition;
}

/** Multiplying by a reciprocal may fall short of a whole number by this much. */
const ROUNDING = 1e-9;
/** A window edge may fall on a formula exactly; rounding must not lose it (u). */
const EDGE = 1e-9;

/**
 * Calls `visit` for every composition of the space whose mass in u lies within [low, high]; `counts` is reused
 * between calls. Loops run over the hetero elements only: C and H follow from the mass defect, because the rest
 * 12 C + 1.007825 H is K + 0.007825 H with the whole number K = 12 C + H. Exhaustive for any window width.
 */
export function forEachFormula(
  space: FormulaSpace,
  low: number,
  high: number,
  visit: (counts: Int32Array, mass: number) => void
): void {
  const { masses, min, max } = space;
  const counts = new Int32Array(masses.length);
  const hydrogen = masses[1];
  const defect = hydrogen - 1;
  // Most mass that the elements from i on can still add, C and H included.
  const most = new Float64Array(masses.length + 1);
  most[masses.length] = max[0] * masses[0] + max[1] * hydrogen;
  for (let i = masses.length - 1; i >= 2; i--) most[i] = most[i + 1] + max[i] * masses[i];
  const lowest = low - EDGE;
  const highest = high + EDGE;

  const perDefect = 1 / defect;
  const [minC, minH, maxC, maxH] = [min[0], min[1], max[0], max[1]];
  const leastK = 12 * minC + minH;
  const mostDefect = defect * maxH;
  const last = masses.length - 1;

  const solveCarbonHydrogen = (mass: number) => {
    const lo = lowest - mass;
    const hi = highest - mass;
    for (let k = Math.max(leastK, Math.ceil(lo - mostDefect)); k <= hi; k++) {
      // For usual windows at most one h fits, and mostly none: that is found out before anything else.
      let h = Math.ceil((lo - k) * perDefect - ROUNDING);
      let hHigh = Math.floor((hi - k) * perDefect + ROUNDING);
      if (h > hHigh) continue;
      h = Math.max(h, minH, k - 12 * maxC);
      hHigh = Math.min(hHigh, maxH, k - 12 * minC);
      // H ≡ K (mod 12), since C must be whole
      h += (((k - h) % 12) + 12) % 12;
      for (; h <= hHigh; h += 12) {
        counts[0] = (k - h) / 12;
        counts[1] = h;
        visit(counts, mass + k + defect * h);
      }
    }
  };

  const descend = (i: number, mass: number) => {
    const unit = masses[i];
    const start = Math.max(min[i], Math.ceil((lowest - mass - most[i + 1]) / unit));
    const end = Math.min(max[i], Math.floor((highest - mass) / unit));
    for (let n = start; n <= end; n++) {
      counts[i] = n;
      if (i === last) solveCarbonHydrogen(mass + n * unit);
      else descend(i + 1, mass + n * unit);
    }
    counts[i] = 0;
  };
  if (last < 2) solveCarbonHydrogen(0);
  else descend(2, 0);
}
