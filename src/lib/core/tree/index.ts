/** Assembling fragmentation trees from scans. The only door to this folder. */
export { assemble, type AssembleOptions } from './assemble';
export { surveyPrecursors, type SurveyedPrecursor } from './survey';
export type { PeaksOf } from './link';
export { mergePeaks, type MergedPeaks } from './merge';
