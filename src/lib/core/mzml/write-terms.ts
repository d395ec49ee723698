/** Terms and small pieces of XML for the writer. */
import type { AnalyserKind, SourceKind } from '../model';

/** Escapes text for an attribute value; control characters that XML 1.0 cannot hold become spaces. */
export function escapeXml(text: string): string {
  return text
    .replace(/\p{Cc}/gu, ' ')
    .replace(/&/g, '&amp;')
    .replace(/</g, '&lt;')
    .replace(/>/g, '&gt;')
    .replace(/"/g, '&quot;');
}

export const UNITS = {
  mz: 'unitCvRef="MS" unitAccession="MS:1000040" unitName="m/z"',
  counts: 'unitCvRef="MS" unitAccession="MS:1000131" unitName="number of detector counts"',
  second: 'unitCvRef="UO" unitAccession="UO:0000010" unitName="second"',
  electronvolt: 'unitCvRef="UO" unitAccession="UO:0000266" unitName="electronvolt"',
  percent: 'unitCvRef="UO" unitAccession="UO:0000187" unitName="percent"'
} as const;

export function cvParam(accession: string, name: string, value: string | number = '', unit = ''): string {
  const tail = unit === '' ? '' : ` ${unit}`;
  return `<cvParam cvRef="MS" accession="${accession}" name="${name}" value="${escapeXml(String(value))}"${tail}/>`;
}

export function userParam(name: string, value: string): string {
  return `<userParam name="${escapeXml(name)}" value="${escapeXml(value)}"/>`;
}

export const SOURCE_TERMS: Readonly<Record<SourceKind, string>> = {
  ESI: cvParam('MS:1000073', 'electrospray ionization'),
  APCI: cvParam('MS:1000070', 'atmospheric pressure chemical ionization'),
  APPI: cvParam('MS:1000382', 'atmospheric pressure photoionization'),
  MALDI: cvParam('MS:1000075', 'matrix-assisted laser desorption ionization'),
  EI: cvParam('MS:1000389', 'electron ionization'),
  CI: cvParam('MS:1000071', 'chemical ionization'),
  unknown: cvParam('MS:1000008', 'ionization type')
};

export const ANALYSER_TERMS: Readonly<Record<AnalyserKind, string>> = {
  orbitrap: cvParam('MS:1000484', 'orbitrap'),
  'ft-icr': cvParam('MS:1000079', 'fourier transform ion cyclotron resonance mass spectrometer'),
  tof: cvParam('MS:1000084', 'time-of-flight'),
  quadrupole: cvParam('MS:1000081', 'quadrupole'),
  'ion-trap': cvParam('MS:1000264', 'ion trap'),
  sector: cvParam('MS:1000080', 'magnetic sector'),
  unknown: cvParam('MS:1000443', 'mass analyzer type')
};

export const ACTIVATION_TERMS: Readonly<Record<string, string>> = {
  CID: cvParam('MS:1000133', 'collision-induced dissociation'),
  HCD: cvParam('MS:1000422', 'beam-type collision-induced dissociation'),
  ETD: cvParam('MS:1000598', 'electron transfer dissociation'),
  ECD: cvParam('MS:1000250', 'electron capture dissociation'),
  UVPD: cvParam('MS:1003246', 'ultraviolet photodissociation'),
  IRMPD: cvParam('MS:1000262', 'infrared multiphoton dissociation'),
  PD: cvParam('MS:1000435', 'photodissociation'),
  unknown: cvParam('MS:1000044', 'dissociation method')
};
