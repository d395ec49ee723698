/** Hand-made mzML text for cases that the writer never produces. */
import { readRun, type ReadOptions } from '$lib/core/mzml';

export interface ArrayText {
  terms: string[];
  /** base64. */
  text: string;
  attributes?: string;
}

export interface SpectrumText {
  id?: string;
  /** default: number of m/z. */
  length?: number;
  params?: string;
  inside?: string;
  mz?: number[];
  intensity?: number[];
  arrays?: ArrayText[];
}

export const cv = (accession: string, value: string | number = '', unit = ''): string =>
  `<cvParam cvRef="MS" accession="${accession}" name="term" value="${value}"${unit ? ` unitAccession="${unit}"` : ''}/>`;

export function doubles(values: number[]): string {
  return Buffer.from(Float64Array.from(values).buffer).toString('base64');
}

const ARRAYS = { mz: 'MS:1000514', intensity: 'MS:1000515' } as const;

/** A plain 64-bit array. */
export function plainArray(kind: keyof typeof ARRAYS, values: number[]): ArrayText {
  return { terms: ['MS:1000523', 'MS:1000576', ARRAYS[kind]], text: doubles(values) };
}

function arrayXml({ terms, text, attributes = '' }: ArrayText): string {
  return `<binaryDataArray encodedLength="${text.length}" ${attributes}>${terms.map((term) => cv(term)).join('')}<binary>${text}</binary></binaryDataArray>`;
}

export function spectrumXml(spectrum: SpectrumText, index: number): string {
  const mz = spectrum.mz ?? [100, 200];
  const intensity = spectrum.intensity ?? mz.map((_mz, i) => 10 * (i + 1));
  const arrays = spectrum.arrays ?? [plainArray('mz', mz), plainArray('intensity', intensity)];
  const params = spectrum.params ?? cv('MS:1000511', 1) + cv('MS:1000130') + cv('MS:1000127');
  return `<spectrum index="${index}" id="${spectrum.id ?? `scan=${index + 1}`}" defaultArrayLength="${spectrum.length ?? mz.length}">${params}${spectrum.inside ?? ''}<binaryDataArrayList count="${arrays.length}">${arrays.map(arrayXml).join('')}</binaryDataArrayList></spectrum>`;
}

export interface FileText {
  declaration?: string;
  version?: string;
  head?: string;
  run?: string;
  body?: string;
  tail?: string;
}

/** A plain (not indexed) file around spectra. */
export function mzmlText(spectra: SpectrumText[], file: FileText = {}): string {
  const body = file.body ?? spectra.map(spectrumXml).join('\n');
  return `${file.declaration ?? '<?xml version="1.0" encoding="utf-8"?>\n'}<mzML xmlns="http://psi.hupo.org/ms/mzml" version="${file.version ?? '1.1.0'}">${file.head ?? ''}<run id="r" ${file.run ?? ''}><spectrumList count="${spectra.length}">\n${body}\n</spectrumList></run></mzML>${file.tail ?? ''}`;
}

/** Bytes as a stream of pieces of the given size. */
export async function* pieces(bytes: Uint8Array, size = 1 << 20): AsyncGenerator<Uint8Array> {
  for (let at = 0; at < bytes.length; at += size) yield bytes.subarray(at, at + size);
}

export function readBytes(bytes: Uint8Array, options: ReadOptions = {}, size?: number) {
  return readRun(pieces(bytes, size), options);
}

export function readText(text: string, options: ReadOptions = {}) {
  return readBytes(new TextEncoder().encode(text), options);
}
