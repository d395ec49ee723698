/** Small files of many forms, made here, from which the damaged ones are derived. */
import { createHash } from 'node:crypto';
import { deflateSync } from 'node:zlib';
import { writeMzml, type ScanToWrite, type WriteOptions } from '$lib/core/mzml';
import type { PrecursorRecord } from '$lib/core/model';
import { cv, mzmlText, plainArray, spectrumXml } from '../helpers/mzml-text';
import { Random } from './random';

const sha1 = () => {
  const hash = createHash('sha1');
  return { update: (bytes: Uint8Array) => void hash.update(bytes), hex: () => hash.digest('hex') };
};

function precursorOf(level: number, from: number): PrecursorRecord {
  return {
    spectrumRef: `controllerType=0 controllerNumber=1 scan=${from}`,
    level: level > 2 ? level - 1 : null,
    isolation: { target: 500.25 / level, lower: 0.5, upper: 0.75 },
    selectedMz: 500.2513 / level,
    charge: level === 3 ? null : 1,
    intensity: 1234.5,
    activations: ['HCD'],
    energy: 35,
    energyUnit: level === 2 ? '%' : 'eV'
  };
}

/** Scans of stages 1, 2, 2, 3 in turn. */
function someScans(count: number, random: Random): ScanToWrite[] {
  return Array.from({ length: count }, (_value, i): ScanToWrite => {
    const level = [1, 2, 2, 3][i % 4];
    const mz = Float64Array.from({ length: 1 + random.below(30) }, () => 50 + 900 * random.next()).sort();
    return {
      id: `controllerType=0 controllerNumber=1 scan=${i + 1}`,
      level,
      polarity: i % 7 === 6 ? 'negative' : 'positive',
      time: i * 1.25,
      centroided: true,
      analyser: level === 1 ? 'orbitrap' : 'ion-trap',
      precursors: level === 1 ? [] : [precursorOf(level, i)],
      filterString:
        level === 1 ? null : `FTMS + c ESI d Full ms${level} ${(500.25 / level).toFixed(4)}@hcd35.00 [50-1000]`,
      peaks: { mz, intensity: mz.map(() => Math.round(1e5 * random.next())) }
    };
  });
}

function written(options: WriteOptions, seed: number): Buffer {
  const scans = someScans(12, new Random(seed));
  return Buffer.from(writeMzml({ id: 'run', ionSource: 'ESI', analyser: 'orbitrap', scans }, { sha1, ...options }));
}

const NUMPRESS = {
  linear: 'QPhqAAAAAACAlpgAIB2aAIg=',
  pic: 'ZGZWZmZ2',
  slof: 'QMOIAAAAAABHtCnP794k6g=='
};
const zlibbed = (base64: string) => deflateSync(Buffer.from(base64, 'base64')).toString('base64');

/** Numpress alone and with zlib, parameter groups, entities, foreign arrays, user parameters, several precursors. */
function unusual(): Buffer {
  const numpress = spectrumXml(
    {
      length: 4,
      arrays: [
        { terms: ['MS:1000523', 'MS:1002312', 'MS:1000514'], text: NUMPRESS.linear },
        { terms: ['MS:1000521', 'MS:1002748', 'MS:1000515'], text: zlibbed(NUMPRESS.slof) }
      ]
    },
    0
  );
  const twoTerms = spectrumXml(
    {
      length: 4,
      params: '<referenceableParamGroupRef ref="group"/>' + cv('MS:1000796', 'File:&quot;a&amp;b&quot;'),
      arrays: [
        { terms: ['MS:1000523', 'MS:1002312', 'MS:1000574', 'MS:1000514'], text: zlibbed(NUMPRESS.linear) },
        { terms: ['MS:1000523', 'MS:1002313', 'MS:1000515'], text: NUMPRESS.pic },
        { ...plainArray('mz', [1, 2, 3, 4]), terms: ['MS:1000523', 'MS:1000576', 'MS:1000786'] }
      ]
    },
    1
  );
  const precursor = (mz: number) =>
    `<precursor><isolationWindow>${cv('MS:1000827', mz)}<userParam name="ms level" value="2" type="xsd:int"/></isolationWindow><selectedIonList count="1"><selectedIon>${cv('MS:1000744', mz)}</selectedIon></selectedIonList><activation>${cv('MS:1000133')}</activation></precursor>`;
  const sps = (index: number) =>
    spectrumXml(
      {
        id: `a &lt;b&gt; ${index}`,
        mz: [300, 100, 200],
        params: cv('MS:1000511', 3) + cv('MS:1000130') + cv('MS:1000128'),
        inside: `<scanList count="1">${cv('MS:1000795')}<scan>${cv('MS:1000016', '0.5', 'UO:0000031')}<userParam name='filter string' value="ITMS + c NSI sps d Full ms3 614.33@cid35.00 498.19@hcd65.00"/></scan></scanList><precursorList count="2">${precursor(498.19)}${precursor(377.1 + index)}</precursorList>`
      },
      index
    );
  const head = `<referenceableParamGroupList count="1"><referenceableParamGroup id="group">${cv('MS:1000511', 1)}${cv('MS:1000130')}</referenceableParamGroup></referenceableParamGroupList>`;
  return Buffer.from(mzmlText([], { head, body: [numpress, twoTerms, sps(2), sps(3), sps(4)].join('\r\n') }));
}

/** Spectra of one form with values that differ in every way that a value can. */
function manyValues(): Buffer {
  const values = ['1', ' 2 ', '3e0', 'NaN', '', '&#52;', '5', "it's", '6&amp;7', '-8', '0'];
  return Buffer.from(
    mzmlText(
      values.map((value, i) => ({
        id: ` id ${value} `,
        params:
          cv('MS:1000511', (i % 3) + 1) + cv('MS:1000130') + cv('MS:1000285', i % 2 ? value.replace(/[^\d]/g, '') : ''),
        inside: `<userParam name="note" value="${value}"/>`
      })),
      { declaration: '<?xml version="1.0" encoding="iso-8859-1"?>' }
    )
  );
}

/** Every fixture by name. */
export function fixtures(): Map<string, Buffer> {
  return new Map([
    ['written indexed', written({}, 1)],
    ['written plain 32-bit', written({ compression: 'none', mzBits: 32, indexed: false }, 2)],
    ['written uncompressed', written({ compression: 'none', intensityBits: 64 }, 3)],
    ['unusual', unusual()],
    ['many values', manyValues()]
  ]);
}
