/** Writes scans as mzML 1.1, indexed or plain, deterministic to the byte. */
import { deflate } from 'pako';
import type { AnalyserKind, SourceKind } from '../model';
import { encodeBase64 } from './base64';
import { CV } from './cv';
import type { StreamingHash } from './options';
import { spectrumHead, type ScanToWrite } from './write-spectrum';
import { ANALYSER_TERMS, cvParam, escapeXml, SOURCE_TERMS, UNITS, userParam } from './write-terms';

export interface RunToWrite {
  /** identifier of the run and the document. */
  id: string;
  scans: readonly ScanToWrite[];
  ionSource?: SourceKind;
  /** analyser of scans that name none. */
  analyser?: AnalyserKind;
  /** free text for the instrument. */
  instrument?: string;
  /** xs:dateTime. */
  startTime?: string;
  /** name of the sample, and free facts about it. */
  sample?: { name: string; remarks?: Readonly<Record<string, string>> };
}

export interface WriteOptions {
  compression?: 'zlib' | 'none';
  mzBits?: 32 | 64;
  intensityBits?: 32 | 64;
  /** false: a plain mzML root without index and checksum. */
  indexed?: boolean;
  /** makes the SHA-1 of the fileChecksum; without it the checksum is written as 0. */
  sha1?: () => StreamingHash;
}

const NAMESPACE = 'xmlns="http://psi.hupo.org/ms/mzml" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance"';
const SCHEMA = 'http://psidev.info/files/ms/mzML/xsd/';

class Output {
  private readonly encoder = new TextEncoder();
  private readonly parts: Uint8Array[] = [];
  length = 0;

  constructor(private hash: StreamingHash | null) {}

  /** The hash of everything written so far; what follows is not hashed. */
  takeHash(): string {
    const hex = this.hash?.hex() ?? '0';
    this.hash = null;
    return hex;
  }

  bytes(part: Uint8Array): void {
    this.parts.push(part);
    this.length += part.length;
    this.hash?.update(part);
  }

  text(text: string): void {
    this.bytes(this.encoder.encode(text));
  }

  joined(): Uint8Array {
    const all = new Uint8Array(this.length);
    let at = 0;
    for (const part of this.parts) {
      all.set(part, at);
      at += part.length;
    }
    return all;
  }
}

function toBytes(values: Float64Array, bits: 32 | 64): Uint8Array {
  const bytes = new Uint8Array((values.length * bits) / 8);
  const view = new DataView(bytes.buffer);
  values.forEach((value, i) =>
    bits === 64 ? view.setFloat64(i * 8, value, true) : view.setFloat32(i * 4, value, true)
  );
  return bytes;
}

function writeArray(out: Output, values: Float64Array, bits: 32 | 64, zlib: boolean, term: string): void {
  const raw = toBytes(values, bits);
  const text = encodeBase64(zlib ? deflate(raw) : raw);
  const type = bits === 64 ? cvParam('MS:1000523', '64-bit float') : cvParam('MS:1000521', '32-bit float');
  const compression = zlib ? cvParam('MS:1000574', 'zlib compression') : cvParam('MS:1000576', 'no compression');
  out.text(`<binaryDataArray encodedLength="${text.length}">\n${type}\n${compression}\n${term}\n<binary>`);
  out.bytes(text);
  out.text('</binary>\n</binaryDataArray>\n');
}

function configurationXml(run: RunToWrite, analyser: AnalyserKind, id: string): string {
  return [
    `<instrumentConfiguration id="${id}">`,
    cvParam(CV.instrumentModel, 'instrument model'),
    ...(run.instrument ? [userParam('instrument', run.instrument)] : []),
    '<componentList count="3">',
    `<source order="1">\n${SOURCE_TERMS[run.ionSource ?? 'unknown']}\n</source>`,
    `<analyzer order="2">\n${ANALYSER_TERMS[analyser]}\n</analyzer>`,
    `<detector order="3">\n${cvParam('MS:1000026', 'detector type')}\n</detector>`,
    '</componentList>',
    '</instrumentConfiguration>'
  ].join('\n');
}

function sampleXml(sample: RunToWrite['sample']): string {
  if (!sample) return '';
  const remarks = Object.entries(sample.remarks ?? {}).map(([name, value]) => userParam(name, value));
  return `<sampleList count="1">\n<sample id="sample1" name="${escapeXml(sample.name)}">\n${remarks.join('\n')}\n</sample>\n</sampleList>\n`;
}

function headXml(run: RunToWrite, configurations: ReadonlyMap<AnalyserKind, string>): string {
  const shapes = new Set(run.scans.map((scan) => (scan.level === 1 ? 1 : 2)));
  return [
    `<mzML ${NAMESPACE} xsi:schemaLocation="http://psi.hupo.org/ms/mzml ${SCHEMA}mzML1.1.0.xsd" id="${escapeXml(run.id)}" version="1.1.0">`,
    '<cvList count="2">',
    '<cv id="MS" fullName="Proteomics Standards Initiative Mass Spectrometry Ontology" URI="https://raw.githubusercontent.com/HUPO-PSI/psi-ms-CV/master/psi-ms.obo"/>',
    '<cv id="UO" fullName="Unit Ontology" URI="https://raw.githubusercontent.com/bio-ontology-research-group/unit-ontology/master/unit.obo"/>',
    '</cvList>',
    '<fileDescription>\n<fileContent>',
    ...(shapes.has(1) ? [cvParam(CV.ms1Spectrum, 'MS1 spectrum')] : []),
    ...(shapes.has(2) ? [cvParam(CV.msnSpectrum, 'MSn spectrum')] : []),
    '</fileContent>\n</fileDescription>',
    `${sampleXml(run.sample)}<softwareList count="1">\n<software id="writer" version="1">\n${cvParam('MS:1000799', 'custom unreleased software tool')}\n</software>\n</softwareList>`,
    `<instrumentConfigurationList count="${configurations.size}">`,
    ...[...configurations].map(([analyser, id]) => configurationXml(run, analyser, id)),
    '</instrumentConfigurationList>',
    `<dataProcessingList count="1">\n<dataProcessing id="processing">\n<processingMethod order="0" softwareRef="writer">\n${cvParam('MS:1000544', 'Conversion to mzML')}\n</processingMethod>\n</dataProcessing>\n</dataProcessingList>`,
    `<run id="${escapeXml(run.id)}" defaultInstrumentConfigurationRef="IC1"${run.sample ? ' sampleRef="sample1"' : ''}${run.startTime ? ` startTimeStamp="${escapeXml(run.startTime)}"` : ''}>`,
    `<spectrumList count="${run.scans.length}" defaultDataProcessingRef="processing">\n`
  ].join('\n');
}

function writeIndex(out: Output, offsets: readonly [string, number][]): void {
  const at = out.length;
  out.text('<indexList count="1">\n<index name="spectrum">\n');
  for (const [id, offset] of offsets) out.text(`<offset idRef="${escapeXml(id)}">${offset}</offset>\n`);
  out.text(`</index>\n</indexList>\n<indexListOffset>${at}</indexListOffset>\n<fileChecksum>`);
  out.text(`${out.takeHash()}</fileChecksum>\n</indexedmzML>\n`);
}

/**
 * Writes a run as an mzML 1.1 file.
 * @param run scans in the order to write; m/z sorted, times in s
 * @returns the bytes of the file (UTF-8); the same input gives the same bytes
 */
export function writeMzml(run: RunToWrite, options: WriteOptions = {}): Uint8Array {
  const indexed = options.indexed ?? true;
  const out = new Output(indexed ? (options.sha1?.() ?? null) : null);
  const fallback = run.analyser ?? 'unknown';
  const analysers = [...new Set(run.scans.map((scan) => scan.analyser ?? fallback))];
  if (analysers.length === 0) analysers.push(fallback);
  const configurations = new Map(analysers.map((analyser, i) => [analyser, `IC${i + 1}`]));
  const zlib = options.compression !== 'none';
  out.text('<?xml version="1.0" encoding="utf-8"?>\n');
  if (indexed)
    out.text(
      `<indexedmzML ${NAMESPACE} xsi:schemaLocation="http://psi.hupo.org/ms/mzml ${SCHEMA}mzML1.1.2_idx.xsd">\n`
    );
  out.text(headXml(run, configurations));
  const offsets: [string, number][] = [];
  run.scans.forEach((scan, index) => {
    offsets.push([scan.id, out.length]);
    out.text(spectrumHead(scan, index, configurations.get(scan.analyser ?? fallback) ?? 'IC1'));
    writeArray(out, scan.peaks.mz, options.mzBits ?? 64, zlib, cvParam(CV.mzArray, 'm/z array', '', UNITS.mz));
    writeArray(
      out,
      scan.peaks.intensity,
      options.intensityBits ?? 32,
      zlib,
      cvParam(CV.intensityArray, 'intensity array', '', UNITS.counts)
    );
    out.text('</binaryDataArrayList>\n</spectrum>\n');
  });
  out.text('</spectrumList>\n</run>\n</mzML>\n');
  if (indexed) writeIndex(out, offsets);
  return out.joined();
}
