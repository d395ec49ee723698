/** What the reader takes from the XML of one spectrum: plain text facts, before anything is made of them. */
import { elementParams, type Param } from './params';
import { attribute, child, children, type XmlElement } from './xml';

/** Parameters of one element: ids of the parameter groups it refers to, then its own, cvParams before userParams. */
export interface ParamSet {
  refs: string[];
  own: Param[];
}

export interface PrecursorText {
  spectrumRef: string | null;
  params: ParamSet;
  window: ParamSet;
  /** of the first selected ion. */
  ion: ParamSet;
  activation: ParamSet;
}

export interface ArrayText {
  arrayLength: string | null;
  encodedLength: string | null;
  hasBinary: boolean;
  params: ParamSet;
}

/** Base64 text of one array: its bytes, and the same as text where that is at hand. Valid until more bytes are read. */
export interface BinaryText {
  bytes: Uint8Array;
  text: string | null;
}

export interface SpectrumRecord {
  id: string | null;
  defaultArrayLength: string | null;
  params: ParamSet;
  /** the first scan of the scan list. */
  scan: { configurationRef: string | null; params: ParamSet } | null;
  precursors: PrecursorText[];
  arrays: ArrayText[];
}

function readPrecursor(element: XmlElement): PrecursorText {
  const ions = child(element, 'selectedIonList');
  return {
    spectrumRef: attribute(element, 'spectrumRef'),
    params: elementParams(element),
    window: elementParams(child(element, 'isolationWindow')),
    ion: elementParams(ions ? child(ions, 'selectedIon') : null),
    activation: elementParams(child(element, 'activation'))
  };
}

function readArray(element: XmlElement): ArrayText {
  return {
    arrayLength: attribute(element, 'arrayLength'),
    encodedLength: attribute(element, 'encodedLength'),
    hasBinary: children(element, 'binary').length > 0,
    params: elementParams(element)
  };
}

function listed(element: XmlElement, list: string, item: string): XmlElement[] {
  const parent = child(element, list);
  return parent ? children(parent, item) : [];
}

/**
 * The record of a parsed `spectrum` element.
 * @throws CoreError `doctype` for an entity that mzML does not define.
 */
export function recordOf(element: XmlElement): SpectrumRecord {
  const scan = listed(element, 'scanList', 'scan').at(0);
  return {
    id: attribute(element, 'id'),
    defaultArrayLength: attribute(element, 'defaultArrayLength'),
    params: elementParams(element),
    scan: scan
      ? { configurationRef: attribute(scan, 'instrumentConfigurationRef'), params: elementParams(scan) }
      : null,
    precursors: listed(element, 'precursorList', 'precursor').map(readPrecursor),
    arrays: listed(element, 'binaryDataArrayList', 'binaryDataArray').map(readArray)
  };
}
