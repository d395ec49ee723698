/**
 * Tags of plainly written XML, one at a time: double quotes, printable ASCII without `<` and `>` in values, no space around
 * `=`. Whatever is not of this form does not match.
 */
import { KNOWN_ACCESSIONS } from './cv';
import type { Param } from './params';
import { decodeEntities } from './xml';

const GAP = '[ \\t\\r\\n]';
/** Printable ASCII without the double quote, `&`, `<` and `>`. */
const PLAIN = "[ !#-%'-;=?-~]*";
/** The same with `&`. */
const VALUE = '[ !#-;=?-~]*';
const UNIT = `(?: unitCvRef="${PLAIN}")?(?: unitAccession="([\\w:]*)")?(?: unitName="${PLAIN}")?(?: unitCvRef="${PLAIN}")?`;
const CLOSE = `${GAP}*/>${GAP}*`;

/** A cvParam with its attributes in the order that nearly every writer uses, behind it the next tag. */
const cvParam = (value: string) =>
  new RegExp(
    `<cvParam cvRef="\\w*" accession="([\\w:]+)" name="(${value})"(?: value="(${value})")?${UNIT}${CLOSE}`,
    'y'
  );
const CV_PARAM = cvParam(PLAIN);
const CV_PARAM_WITH_REFERENCES = cvParam(VALUE);
const USER_PARAM = new RegExp(
  `<userParam name="(${VALUE})"(?: value="(${VALUE})")?(?: type="${PLAIN}")?(?: value="(${VALUE})")?${UNIT}${CLOSE}`,
  'y'
);
const TAG = new RegExp(`<(/?)(\\w+)([^<>]*)>${GAP}*`, 'y');
const ATTRIBUTE = new RegExp(`${GAP}+(\\w+)="(${VALUE})"`, 'y');
const REST = new RegExp(`^${GAP}*$`);

/** Attributes that mzML 1.1 gives to the elements of a spectrum. */
const ATTRIBUTES = new Set([
  ...['id', 'index', 'spotID', 'defaultArrayLength', 'dataProcessingRef', 'sourceFileRef', 'count', 'ref'],
  ...['instrumentConfigurationRef', 'spectrumRef', 'externalSpectrumID', 'encodedLength', 'arrayLength']
]);

/** A parameter and the index behind it. */
export interface ParamMatch {
  param: Param;
  end: number;
}

export interface Tag {
  kind: 'start' | 'end' | 'empty';
  name: string;
  attributes: ReadonlyMap<string, string>;
  end: number;
}

const NO_ATTRIBUTES: ReadonlyMap<string, string> = new Map();

/** As the XML parser hands out a value: without space at its ends. */
function trimmed(value: string): string {
  const ends = value.charCodeAt(0) === 32 || value.charCodeAt(value.length - 1) === 32;
  return ends ? value.trim() : value;
}

function matchAt(pattern: RegExp, text: string, at: number): RegExpExecArray | null {
  pattern.lastIndex = at;
  return pattern.exec(text);
}

/** Accessions that the reader knows come as one and the same text, which is quick to compare. */
function sameText(accession: string): string {
  return KNOWN_ACCESSIONS.get(accession) ?? accession;
}

/**
 * The cvParam at `at`, or null.
 * @throws CoreError `doctype` for an entity that mzML does not define
 */
export function matchCvParam(text: string, at: number): ParamMatch | null {
  const plain = matchAt(CV_PARAM, text, at);
  if (plain) {
    const param = {
      accession: sameText(plain[1]),
      name: trimmed(plain[2]),
      value: trimmed(plain[3] ?? ''),
      unit: plain[4] ?? null
    };
    return { param, end: CV_PARAM.lastIndex };
  }
  const found = matchAt(CV_PARAM_WITH_REFERENCES, text, at);
  if (!found) return null;
  const param = {
    accession: sameText(found[1]),
    name: decodeEntities(trimmed(found[2])),
    value: decodeEntities(trimmed(found[3] ?? '')),
    unit: found[4] ?? null
  };
  return { param, end: CV_PARAM_WITH_REFERENCES.lastIndex };
}

/** The userParam at `at`, or null. Errors as for `matchCvParam`. */
export function matchUserParam(text: string, at: number): ParamMatch | null {
  const found = matchAt(USER_PARAM, text, at);
  if (!found || (found[2] !== undefined && found[3] !== undefined)) return null;
  const param = {
    accession: null,
    name: decodeEntities(trimmed(found[1])),
    value: decodeEntities(trimmed(found[2] ?? found[3] ?? '')),
    unit: found[4] ?? null
  };
  return { param, end: USER_PARAM.lastIndex };
}

function readAttributes(text: string): ReadonlyMap<string, string> | null {
  const attributes = new Map<string, string>();
  let at = 0;
  for (let found = matchAt(ATTRIBUTE, text, at); found; found = matchAt(ATTRIBUTE, text, at)) {
    const name = found[1];
    if (!ATTRIBUTES.has(name) || attributes.has(name)) return null;
    attributes.set(name, decodeEntities(trimmed(found[2])));
    at = ATTRIBUTE.lastIndex;
  }
  return REST.test(text.slice(at)) ? attributes : null;
}

/** The tag at `at` with the white space behind it, or null. Errors as for `matchCvParam`. */
export function matchTag(text: string, at: number): Tag | null {
  const found = matchAt(TAG, text, at);
  if (!found) return null;
  const { lastIndex } = TAG;
  const [, closing, name, inner] = found;
  if (closing) return inner === '' ? { kind: 'end', name, attributes: NO_ATTRIBUTES, end: lastIndex } : null;
  const empty = inner.endsWith('/');
  const kind = empty ? 'empty' : 'start';
  if (inner === '') return { kind, name, attributes: NO_ATTRIBUTES, end: lastIndex };
  const attributes = readAttributes(empty ? inner.slice(0, -1) : inner);
  return attributes && { kind, name, attributes, end: lastIndex };
}
