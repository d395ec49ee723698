export { cosine, type CosineOptions } from './cosine';
export { entropySimilarity, spectralEntropy } from './entropy';
export { matchPeaks, type PeakPair } from './match';
export { compareTrees, type TreeComparison, type TreeSketch } from './tree';
