/** What stands before the first spectrum: parameter groups, instrument configurations, content of the file, the run. */
import { CoreError } from '../errors';
import type { AnalyserKind, SourceKind } from '../model';
import { ANALYSERS, CV, SOURCES } from './cv';
import { Params, readParamGroups, type ParamGroups } from './params';
import { attribute, child, children, parseXml, type XmlElement } from './xml';

export interface InstrumentConfiguration {
  source: SourceKind;
  analyser: AnalyserKind;
  model: string | null;
}

export interface FileHead {
  version: string;
  groups: ParamGroups;
  configurations: ReadonlyMap<string, InstrumentConfiguration>;
  defaultConfiguration: string | null;
  /** centroid or profile where only the file as a whole says so. */
  centroided: boolean | null;
  startTime: string | null;
}

const NOT_MODELS = new Set<string>([CV.instrumentModel, 'MS:1000529', 'MS:1000032']);

function component(list: XmlElement[], groups: ParamGroups): Params[] {
  return list.map((element) => Params.ofElement(element, groups));
}

/** The last analyser that the ions reach is the one that records the spectrum. */
function lastAnalyser(components: XmlElement | null, groups: ParamGroups): AnalyserKind {
  if (!components) return 'unknown';
  const ordered = children(components, 'analyzer')
    .map((element, i) => ({ element, order: Number(attribute(element, 'order') ?? i) || i }))
    .sort((a, b) => a.order - b.order)
    .map((entry) => entry.element);
  const kinds = component(ordered, groups).map((params) => {
    const term = params.all.findLast((param) => ANALYSERS.has(param.accession ?? ''));
    return term ? ANALYSERS.get(term.accession ?? '') : undefined;
  });
  return kinds.findLast((kind) => kind !== undefined) ?? 'unknown';
}

function readConfiguration(element: XmlElement, groups: ParamGroups): InstrumentConfiguration {
  const components = child(element, 'componentList');
  const sources = components ? component(children(components, 'source'), groups) : [];
  const kind = sources.flatMap((params) => params.all).map((param) => SOURCES.get(param.accession ?? ''));
  const params = Params.ofElement(element, groups);
  const model = params.all.find((param) => param.accession?.startsWith('MS:') && !NOT_MODELS.has(param.accession));
  return {
    source: kind.findLast((source) => source !== undefined) ?? 'unknown',
    analyser: lastAnalyser(components, groups),
    model: model?.name.slice(0, 120) ?? null
  };
}

function centroidedByContent(mzml: XmlElement, groups: ParamGroups): boolean | null {
  const description = child(mzml, 'fileDescription');
  const content = Params.ofElement(description ? child(description, 'fileContent') : null, groups);
  const centroid = content.has(CV.centroid);
  return centroid === content.has(CV.profile) ? null : centroid;
}

function checkVersion(mzml: XmlElement): string {
  const version = attribute(mzml, 'version') ?? '';
  if (version !== '' && !/^1(\.|$)/.test(version.trim())) {
    throw new CoreError(
      'unsupported-version',
      `This is mzML ${version.slice(0, 20)}, an obsolete form that cannot be read`,
      { byte: 0, scan: null },
      'Convert the original data to mzML 1.1.'
    );
  }
  return version;
}

/**
 * Reads the head of a file: everything up to the list of spectra, whose open elements need no closing tags.
 * @throws CoreError `not-mzml`, `unsupported-version` or `xml`.
 */
export function readHead(text: string): FileHead {
  const { name, element } = parseXml(text);
  const mzml = name === 'mzML' ? element : child(element, 'mzML');
  if (!mzml) throw new CoreError('not-mzml', 'The file holds no mzML element', { byte: 0, scan: null });
  const version = checkVersion(mzml);
  const groups = readParamGroups(child(mzml, 'referenceableParamGroupList'));
  const list = child(mzml, 'instrumentConfigurationList');
  const configurations = new Map(
    (list ? children(list, 'instrumentConfiguration') : []).map((item) => [
      attribute(item, 'id') ?? '',
      readConfiguration(item, groups)
    ])
  );
  const run = child(mzml, 'run');
  return {
    version,
    groups,
    configurations,
    defaultConfiguration: run ? attribute(run, 'defaultInstrumentConfigurationRef') : null,
    centroided: centroidedByContent(mzml, groups),
    startTime: run ? attribute(run, 'startTimeStamp') : null
  };
}
