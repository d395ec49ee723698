/** One `spectrum` element as a scan. */
import { CoreError } from '../errors';
import type { AnalyserKind, PeakList, Polarity, PrecursorRecord, Scan } from '../model';
import { centroid, isCentroided } from './centroid';
import { CV } from './cv';
import { parseFilterString, type FilterString } from './filter-string';
import type { FileHead } from './head';
import type { ReadSettings } from './options';
import { Params } from './params';
import { NO_PEAKS, pairPeaks, readArrays } from './peaks';
import { detached } from './detached';
import { mergeFilter, readPrecursor } from './precursor';
import { recordOf, type BinaryText, type ParamSet, type SpectrumRecord } from './record';
import type { WarningCollector } from './warnings';
import { attribute, parseXml } from './xml';

/** A spectrum that is no mass spectrum (absorption of light, for example): passed over. */
export interface SkippedSpectrum {
  skipped: true;
  id: string;
  /** stage as written, usually 0; null where none is written. */
  level: number | null;
}

export interface SpectrumInput {
  /** the XML without the text of its `binary` elements, or the record already taken from it. */
  content: string | SpectrumRecord;
  binaries: readonly BinaryText[];
  /** position in the file, from 0. */
  index: number;
}

const LONGEST_ID = 1000;
const SECONDS: Readonly<Record<string, number>> = {
  [CV.minute]: 60,
  [CV.oldMinute]: 60,
  [CV.millisecond]: 0.001,
  [CV.hour]: 3600
};

function readTime(params: Params): number | null {
  const value = params.number(CV.startTime);
  if (value === null) return null;
  return value * (SECONDS[params.find(CV.startTime)?.unit ?? CV.minute] ?? 1);
}

function readPolarity(params: Params, scan: Params, filter: FilterString | null): Polarity | null {
  for (const source of [params, scan]) {
    if (source.has(CV.positive)) return 'positive';
    if (source.has(CV.negative)) return 'negative';
  }
  return filter?.polarity ?? null;
}

function readLevel(params: Params, filter: FilterString | null, precursors: PrecursorRecord[]): number | null {
  const level = params.number(CV.msLevel);
  if (level !== null) return Math.round(level);
  if (params.has(CV.ms1Spectrum)) return 1;
  if (filter?.level) return filter.level;
  return params.has(CV.msnSpectrum) || precursors.length > 0
    ? Math.max(2, ...precursors.map((p) => (p.level ?? 1) + 1))
    : null;
}

/** The configuration's analyser, unless the filter string names the other one of a hybrid instrument. */
function readAnalyser(scan: SpectrumRecord['scan'], head: FileHead, filter: FilterString | null): AnalyserKind {
  const reference = scan?.configurationRef ?? head.defaultConfiguration ?? '';
  const configured =
    head.configurations.get(reference)?.analyser ?? [...head.configurations.values()][0]?.analyser ?? 'unknown';
  const stated = filter?.analyser ?? null;
  if (stated === null || stated === configured) return configured;
  if (stated !== 'orbitrap') return stated;
  const icr = [...head.configurations.values()].some((item) => item.analyser === 'ft-icr');
  return configured === 'ft-icr' || icr ? 'ft-icr' : 'orbitrap';
}

function readFilter(params: Params, scan: Params): (FilterString & { text: string }) | null {
  const text =
    scan.find(CV.filterString)?.value ??
    params.find(CV.filterString)?.value ??
    scan.user('filter string') ??
    params.user('filter string');
  return text ? { text: detached(text.slice(0, 2000)), ...parseFilterString(text) } : null;
}

function isRadiation(params: Params): boolean {
  return params.has(CV.radiationSpectrum) || params.has(CV.absorptionSpectrum) || params.has(CV.emissionSpectrum);
}

function highest({ mz, intensity }: PeakList): { mz: number | null; intensity: number | null; sum: number } {
  let best = -1;
  let sum = 0;
  for (let i = 0; i < mz.length; i++) {
    sum += intensity[i];
    if (best < 0 || intensity[i] > intensity[best]) best = i;
  }
  return best < 0 ? { mz: null, intensity: null, sum: 0 } : { mz: mz[best], intensity: intensity[best], sum };
}

interface Shape {
  peaks: PeakList;
  centroided: boolean;
  centroidedHere: boolean;
}

function shapePeaks(
  raw: PeakList,
  flag: boolean | null,
  settings: ReadSettings,
  id: string,
  warnings: WarningCollector
): Shape {
  if (!settings.peaks) return { peaks: raw, centroided: flag ?? true, centroidedHere: false };
  const centroided = isCentroided(raw, flag);
  if (flag === true && !centroided)
    warnings.add('profile-flagged-centroid', 'The spectrum is marked centroid but holds profile data', id);
  if (flag === false && centroided && raw.mz.length > 0) {
    warnings.add('centroid-flagged-profile', 'The spectrum is marked profile but holds centroids', id);
  }
  if (centroided || !settings.centroid) return { peaks: raw, centroided, centroidedHere: false };
  return { peaks: centroid(raw), centroided: true, centroidedHere: true };
}

function shapeFlag(params: Params, filter: FilterString | null, head: FileHead): boolean | null {
  if (params.has(CV.centroid)) return true;
  if (params.has(CV.profile)) return false;
  return filter?.centroided ?? head.centroided;
}

/**
 * Builds a scan from the XML and base64 text of one spectrum.
 * @throws CoreError with the scan's id when the spectrum cannot be used; other spectra are not concerned.
 */
export function readSpectrum(
  input: SpectrumInput,
  head: FileHead,
  settings: ReadSettings,
  warnings: WarningCollector
): Scan | SkippedSpectrum {
  const { content } = input;
  const element = typeof content === 'string' ? parseXml(content).element : null;
  const written = typeof content === 'string' ? element && attribute(element, 'id') : content.id;
  const id = detached((written ?? `index=${input.index}`).slice(0, LONGEST_ID));
  try {
    const record = typeof content === 'string' ? recordOf(element ?? {}) : content;
    return buildScan(record, id, input, head, settings, warnings);
  } catch (error) {
    if (!(error instanceof CoreError)) throw error;
    throw new CoreError(error.code, error.message, { byte: error.place.byte, scan: id }, error.cure);
  }
}

const NO_PARAMS: ParamSet = { refs: [], own: [] };

function buildScan(
  record: SpectrumRecord,
  id: string,
  input: SpectrumInput,
  head: FileHead,
  settings: ReadSettings,
  warnings: WarningCollector
): Scan | SkippedSpectrum {
  const params = Params.of(record.params, head.groups);
  const scanParams = Params.of(record.scan?.params ?? NO_PARAMS, head.groups);
  const filter = readFilter(params, scanParams);
  const precursors = mergeFilter(
    record.precursors.map((written) => readPrecursor(written, head.groups)),
    filter
  );
  const level = readLevel(params, filter, precursors);
  if (level === 0 || isRadiation(params)) return { skipped: true, id, level };
  if (level === null) warnings.add('stage-assumed', 'The spectrum states no stage; it was taken as MS1', id);
  const arrays = readArrays(record, input.binaries, head.groups, settings);
  if (arrays.wrongLength) {
    warnings.add(
      'encoded-length',
      'The length that an array states for its text is not the length of that text; the text was read as it is',
      id
    );
  }
  const declared = Number(record.defaultArrayLength ?? 0) || 0;
  const raw = settings.peaks ? pairPeaks(arrays, id, declared, warnings) : NO_PEAKS;
  const top = highest(raw);
  const shape = shapePeaks(raw, shapeFlag(params, filter, head), settings, id, warnings);
  return {
    index: input.index,
    id,
    level: level ?? 1,
    polarity: readPolarity(params, scanParams, filter),
    time: readTime(scanParams) ?? readTime(params),
    centroided: shape.centroided,
    centroidedHere: shape.centroidedHere,
    totalIonCurrent: params.number(CV.totalIonCurrent) ?? top.sum,
    basePeakMz: settings.peaks ? top.mz : params.number(CV.basePeakMz),
    basePeakIntensity: settings.peaks ? top.intensity : params.number(CV.basePeakIntensity),
    precursors,
    filterString: filter?.text ?? null,
    analyser: readAnalyser(record.scan, head, filter),
    peakCount: settings.peaks ? shape.peaks.mz.length : declared,
    peaks: shape.peaks
  };
}
