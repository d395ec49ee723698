/** Writes large mzML files of a known form: one MS1, five MS2, five MS3 and three MS4 spectra in turn, with an index. */
import { createHash } from 'node:crypto';
import { closeSync, openSync, writeSync } from 'node:fs';
import { deflateSync } from 'node:zlib';
import { seeded } from './seeded';

interface Arrays {
  count: number;
  mz: string;
  intensity: string;
  base: [mz: number, intensity: number];
  range: [number, number];
  total: number;
}

/** Peak lists are costly to compress, so a file takes them in turn from a pool of this many cycles. */
const POOL_CYCLES = 12;
const STAGES = [1, ...Array<number>(5).fill(2), ...Array<number>(5).fill(3), ...Array<number>(3).fill(4)];
const packed = (array: Float64Array | Float32Array) =>
  deflateSync(Buffer.from(array.buffer, array.byteOffset, array.byteLength)).toString('base64');

function makeArrays(count: number, highest: number, random: () => number): Arrays {
  const mz = Float64Array.from({ length: count }, () => 50 + (highest - 50) * random() ** 1.3 + random() * 1e-7).sort();
  const intensity = Float32Array.from({ length: count }, () => Math.exp(8 + 8 * random()));
  const top = intensity.reduce((best, value, i) => (value > intensity[best] ? i : best), 0);
  return {
    count,
    mz: packed(mz),
    intensity: packed(intensity),
    base: [mz[top], intensity[top]],
    range: [mz[0], mz[count - 1]],
    total: intensity.reduce((sum, value) => sum + value, 0)
  };
}

const MZ = ' unitCvRef="MS" unitAccession="MS:1000040" unitName="m/z"';
const COUNTS = ' unitCvRef="MS" unitAccession="MS:1000131" unitName="number of detector counts"';
const term = (accession: string, name: string, value: string | number = '', unit = '') =>
  `<cvParam cvRef="MS" accession="MS:${accession}" name="${name}" value="${value}"${unit}/>\n`;
const nativeId = (scan: number) => `controllerType=0 controllerNumber=1 scan=${scan}`;

interface Precursor {
  scan: number;
  /** isolated m/z at each stage, the last one first. */
  path: number[];
}

function precursorXml({ scan, path }: Precursor): string {
  return `        <precursorList count="1">
          <precursor spectrumRef="${nativeId(scan)}">
            <isolationWindow>
              ${term('1000827', 'isolation window target m/z', path[0].toFixed(4), MZ)}              ${term('1000828', 'isolation window lower offset', '0.75', MZ)}              ${term('1000829', 'isolation window upper offset', '0.75', MZ)}            </isolationWindow>
            <selectedIonList count="1">
              <selectedIon>
                ${term('1000744', 'selected ion m/z', path[0], MZ)}                ${term('1000041', 'charge state', 1)}                ${term('1000042', 'peak intensity', '125034.5', COUNTS)}              </selectedIon>
            </selectedIonList>
            <activation>
              ${term('1000422', 'beam-type collision-induced dissociation')}              ${term('1000045', 'collision energy', '35.0', ' unitCvRef="UO" unitAccession="UO:0000266" unitName="electronvolt"')}            </activation>
          </precursor>
        </precursorList>
`;
}

function arrayXml(text: string, bits: 32 | 64): string {
  const type = bits === 64 ? term('1000523', '64-bit float') : term('1000521', '32-bit float');
  const kind = bits === 64 ? term('1000514', 'm/z array', '', MZ) : term('1000515', 'intensity array', '', COUNTS);
  return `          <binaryDataArray encodedLength="${text.length}">
            ${type}            ${term('1000574', 'zlib compression')}            ${kind}            <binary>${text}</binary>
          </binaryDataArray>
`;
}

function spectrumXml(scan: number, level: number, arrays: Arrays, precursor: Precursor | null): string {
  const stages = precursor ? [...precursor.path].reverse().map((mz) => `${mz.toFixed(4)}@hcd35.00`) : [];
  const filter = `FTMS + c ESI ${precursor ? `d Full ms${level} ${stages.join(' ')}` : 'Full ms'} [50.0000-1500.0000]`;
  return `<spectrum index="${scan - 1}" id="${nativeId(scan)}" defaultArrayLength="${arrays.count}">
        ${level === 1 ? term('1000579', 'MS1 spectrum') : term('1000580', 'MSn spectrum')}        ${term('1000511', 'ms level', level)}        ${term('1000130', 'positive scan')}        ${term('1000127', 'centroid spectrum')}        ${term('1000504', 'base peak m/z', arrays.base[0], MZ)}        ${term('1000505', 'base peak intensity', arrays.base[1], COUNTS)}        ${term('1000285', 'total ion current', arrays.total)}        ${term('1000528', 'lowest observed m/z', arrays.range[0], MZ)}        ${term('1000527', 'highest observed m/z', arrays.range[1], MZ)}        ${term('1000796', 'spectrum title', `made.${scan}.${scan}. File:&quot;made&quot;, NativeID:&quot;${nativeId(scan)}&quot;`)}        <scanList count="1">
          ${term('1000795', 'no combination')}          <scan instrumentConfigurationRef="IC1">
            ${term('1000016', 'scan start time', (scan * 0.0023).toFixed(6), ' unitCvRef="UO" unitAccession="UO:0000031" unitName="minute"')}            ${term('1000512', 'filter string', filter)}            ${term('1000616', 'preset scan configuration', level)}            ${term('1000927', 'ion injection time', '12.034', ' unitCvRef="UO" unitAccession="UO:0000028" unitName="millisecond"')}            <scanWindowList count="1">
              <scanWindow>
                ${term('1000501', 'scan window lower limit', '50.0', MZ)}                ${term('1000500', 'scan window upper limit', '1500.0', MZ)}              </scanWindow>
            </scanWindowList>
          </scan>
        </scanList>
${precursor ? precursorXml(precursor) : ''}        <binaryDataArrayList count="2">
${arrayXml(arrays.mz, 64)}${arrayXml(arrays.intensity, 32)}        </binaryDataArrayList>
      </spectrum>
`;
}

const HEAD = `<?xml version="1.0" encoding="utf-8"?>
<indexedmzML xmlns="http://psi.hupo.org/ms/mzml">
  <mzML xmlns="http://psi.hupo.org/ms/mzml" id="made" version="1.1.0">
    <instrumentConfigurationList count="1">
      <instrumentConfiguration id="IC1">
        <componentList count="2">
          <source order="1">
            ${term('1000073', 'electrospray ionization')}          </source>
          <analyzer order="2">
            ${term('1000484', 'orbitrap')}          </analyzer>
        </componentList>
      </instrumentConfiguration>
    </instrumentConfigurationList>
    <run id="made" defaultInstrumentConfigurationRef="IC1">
    <spectrumList count="0">
`;

/** Appends text to a file and to its SHA-1, in large pieces. */
class Output {
  offset = 0;
  readonly hash = createHash('sha1');
  private readonly file: number;
  private waiting: string[] = [];
  private length = 0;

  constructor(path: string) {
    this.file = openSync(path, 'w');
  }

  write(text: string): void {
    this.waiting.push(text);
    this.length += text.length;
    this.offset += text.length;
    if (this.length > 4e6) this.flush();
  }

  flush(): void {
    const bytes = Buffer.from(this.waiting.join(''), 'latin1');
    this.hash.update(bytes);
    writeSync(this.file, bytes);
    this.waiting = [];
    this.length = 0;
  }

  close(): void {
    this.flush();
    closeSync(this.file);
  }
}

/** Which earlier spectrum of its cycle each spectrum comes from: MS2 from the MS1, MS3 from an MS2, MS4 from an MS3. */
const originInCycle = (position: number) => (position < 6 ? 0 : position - 5);

/**
 * Writes a file of about `bytes` bytes; the same arguments give the same bytes.
 * @returns the number of spectra
 */
export function writeLargeFile(path: string, bytes: number, seed = 1): number {
  const random = seeded(seed);
  const pool = Array.from({ length: POOL_CYCLES }, () =>
    STAGES.map((level) => makeArrays(level === 1 ? 2000 : 100 + Math.floor(300 * random()), 1500 / level, random))
  );
  const output = new Output(path);
  const offsets: number[] = [];
  output.write(HEAD);
  for (let cycle = 0; output.offset + offsets.length * 100 < bytes; cycle++) {
    const first = offsets.length;
    const paths: number[][] = [[]];
    STAGES.forEach((level, position) => {
      const origin = originInCycle(position);
      if (position > 0) paths[position] = [1500 / level - 20 - 30 * random(), ...paths[origin]];
      const precursor = position > 0 ? { scan: first + origin + 1, path: paths[position] } : null;
      output.write('      ');
      offsets.push(output.offset);
      output.write(spectrumXml(offsets.length, level, pool[cycle % POOL_CYCLES][position], precursor));
    });
  }
  output.write('    </spectrumList>\n    </run>\n  </mzML>\n  ');
  const listOffset = output.offset;
  output.write('<indexList count="1">\n    <index name="spectrum">\n');
  offsets.forEach((offset, i) => output.write(`      <offset idRef="${nativeId(i + 1)}">${offset}</offset>\n`));
  output.write(`    </index>\n  </indexList>\n  <indexListOffset>${listOffset}</indexListOffset>\n  <fileChecksum>`);
  output.flush();
  output.write(`${output.hash.copy().digest('hex')}</fileChecksum>\n</indexedmzML>\n`);
  output.close();
  return offsets.length;
}
