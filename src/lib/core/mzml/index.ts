/** Reading and writing mzML. The only door to this folder. */
export { readMzml, readRun, type MzmlEvent, type RunStart, type RunSummary } from './read';
export {
  DEFAULT_LIMITS,
  type Inflate,
  type ByteText,
  type QuickBase64,
  type ReadLimits,
  type ReadOptions,
  type StreamingHash
} from './options';
export { parseFilterString, type FilterStage, type FilterString } from './filter-string';
export { centroid, isCentroided } from './centroid';
export { RandomAccessRun, type IndexOrigin, type RandomAccessSource, type ScanEntry } from './random-access';
export { WarningCollector } from './warnings';
export { writeMzml, type RunToWrite, type WriteOptions } from './write';
export type { ScanToWrite } from './write-spectrum';
