import { parseElementRanges } from '../chem';
import { type ElementRanges, type SuggestOptions } from '../model';

/** Elements of most natural products, drugs and pesticides; wide enough for 1500 u. */
export const DEFAULT_ELEMENTS = 'C0-100H0-200N0-12O0-30P0-2S0-3F0-6Cl0-4Br0-2';

/** The default element ranges as the search takes them. */
export function defaultElementRanges(): ElementRanges {
  return parseElementRanges(DEFAULT_ELEMENTS);
}

/** Options that rank precursor formulas with the usual ion types and the analyser's own tolerance. */
export function defaultSuggestOptions(): SuggestOptions {
  return {
    adducts: [],
    formula: null,
    elements: defaultElementRanges(),
    tolerance: null,
    top: 10,
    ionSource: 'unknown',
    constraints: []
  };
}
