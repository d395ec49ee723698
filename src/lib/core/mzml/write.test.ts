import { createHash } from 'node:crypto';
import { describe, expect, it } from 'vitest';
import { readBytes } from '../../../../tests/helpers/mzml-text';
import { writeMzml, type RunToWrite } from '.';

const run: RunToWrite = {
  id: 'a "run" & more',
  ionSource: 'APCI',
  instrument: 'made up',
  startTime: '2026-01-02T03:04:05Z',
  sample: { name: 'ünknown <x>', remarks: { origin: 'test' } },
  scans: [
    {
      id: 'scan=1',
      level: 1,
      polarity: 'negative',
      time: 1.5,
      analyser: 'tof',
      peaks: { mz: Float64Array.of(99.5, 300.25), intensity: Float64Array.of(5, 7) }
    },
    {
      id: 'scan=2',
      level: 2,
      polarity: 'negative',
      time: 2.5,
      analyser: 'ion-trap',
      filterString: '- c Full ms2 300.25@cid30.00 [50-310]',
      peaks: { mz: Float64Array.of(120.125), intensity: Float64Array.of(3) },
      precursors: [
        {
          spectrumRef: 'scan=1',
          level: 1,
          isolation: { target: 300.25, lower: 0.5, upper: 0.75 },
          selectedMz: 300.25,
          charge: 1,
          intensity: 7,
          activations: ['CID'],
          energy: 30,
          energyUnit: '%'
        }
      ]
    }
  ]
};
const sha1 = () => {
  const hash = createHash('sha1');
  return { update: (bytes: Uint8Array) => void hash.update(bytes), hex: () => hash.digest('hex') };
};

describe('writeMzml', () => {
  it.each([
    {},
    { compression: 'none' as const },
    { mzBits: 32 as const, intensityBits: 64 as const },
    { indexed: false }
  ])('writes what the reader reads back: %o', async (options) => {
    const { scans, summary } = await readBytes(writeMzml(run, options));
    expect(summary.warnings).toEqual([]);
    expect(summary.info).toMatchObject({ ionSource: 'APCI', startTime: run.startTime, polarity: 'negative' });
    run.scans.forEach((wanted, i) => expect(scans[i]).toMatchObject(wanted));
  });

  it('is deterministic, with a checksum over everything before it', () => {
    const file = writeMzml(run, { sha1 });
    expect(writeMzml(run, { sha1 })).toEqual(file);
    const text = Buffer.from(file).toString('latin1');
    const end = text.indexOf('<fileChecksum>') + '<fileChecksum>'.length;
    expect(text.slice(end, end + 40)).toBe(createHash('sha1').update(file.subarray(0, end)).digest('hex'));
  });

  it('writes an index that points at the spectra', () => {
    const file = Buffer.from(writeMzml(run));
    const offsets = [...file.toString('latin1').matchAll(/<offset idRef="(.*?)">(\d+)</g)];
    expect(offsets).toHaveLength(2);
    for (const [, id, offset] of offsets) {
      expect(file.subarray(Number(offset)).toString('latin1')).toMatch(new RegExp(`^<spectrum index="\\d" id="${id}"`));
    }
  });
});
