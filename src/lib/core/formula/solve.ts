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

  const solveCarbonHydrogen = (mass: number) => {
    const lo = lowest - mass;
    const hi = highest - mass;
    const firstK = Math.max(12 * min[0] + min[1], Math.ceil(lo - defect * max[1]));
    const lastK = Math.floor(hi);
    for (let k = firstK; k <= lastK; k++) {
      const hLow = Math.max(min[1], Math.ceil((lo - k) / defect), k - 12 * max[0]);
      const hHigh = Math.min(max[1], Math.floor((hi - k) / defect), k - 12 * min[0]);
      // H ≡ K (mod 12), since C must be whole
      let h = hLow + ((((k - hLow) % 12) + 12) % 12);
      for (; h <= hHigh; h += 12) {
        counts[0] = (k - h) / 12;
        counts[1] = h;
        visit(counts, mass + k + defect * h);
      }
    }
  };

  const descend = (i: number, mass: number) => {
    if (i === masses.length) return solveCarbonHydrogen(mass);
    const unit = masses[i];
    const start = Math.max(min[i], Math.ceil((lowest - mass - most[i + 1]) / unit));
    const end = Math.min(max[i], Math.floor((highest - mass) / unit));
    for (let n = start; n <= end; n++) {
      counts[i] = n;
      descend(i + 1, mass + n * unit);
    }
    counts[i] = 0;
  };
  descend(2, 0);
}
