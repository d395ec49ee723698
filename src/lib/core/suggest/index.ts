/** Formulas for a whole tree: the ranking of precursor formulas and the annotation of every ion. */
export { suggest, type SuggestControl } from './suggest';
export { DEFAULT_ELEMENTS, defaultElementRanges, defaultSuggestOptions } from './defaults';
export { solveTree, type SolveLimits, type TreeEdge, type TreeSolution, type TreeVertex } from './best-tree';
