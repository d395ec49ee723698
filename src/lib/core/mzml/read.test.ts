import { createHash } from 'node:crypto';
import { deflateSync, gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { cv, doubles, mzmlText, pieces, plainArray, readBytes, readText } from '../../../../tests/helpers/mzml-text';
import { readMzml, writeMzml, type StreamingHash } from '.';

const bytesOf = (text: string) => new TextEncoder().encode(text);
const codes = (warnings: { code: string }[]) => warnings.map((warning) => warning.code);
const sha1 = (): StreamingHash => {
  const hash = createHash('sha1');
  return { update: (bytes) => void hash.update(bytes), hex: () => hash.digest('hex') };
};
const list = (...values: number[]) => Float64Array.from(values);

function indexedFile(): Uint8Array {
  return writeMzml(
    {
      id: 'run',
      ionSource: 'ESI',
      scans: [
        {
          id: 'scan=1',
          level: 1,
          polarity: 'positive',
          time: 1,
          analyser: 'orbitrap',
          peaks: { mz: list(100, 200.5), intensity: list(1, 2) }
        },
        {
          id: 'scan=2',
          level: 1,
          polarity: 'positive',
          time: 2,
          analyser: 'ion-trap',
          peaks: { mz: list(150), intensity: list(3) }
        }
      ]
    },
    { sha1 }
  );
}

describe('streaming', () => {
  it('gives the same for any size of the pieces', async () => {
    const file = indexedFile();
    const whole = await readBytes(file, { sha1 });
    for (const size of [1, 2, 3, 17, 100, 1000]) expect(await readBytes(file, { sha1 }, size)).toEqual(whole);
    expect(whole.summary).toMatchObject({ checksum: 'ok', truncated: false, scanCount: 2, bytes: file.length });
    expect(whole.summary.info).toMatchObject({
      analysers: ['ion-trap', 'orbitrap'],
      scans: { '1': 2 },
      ionSource: 'ESI'
    });
  });

  it('tells where each spectrum lies', async () => {
    const file = indexedFile();
    for await (const event of readMzml(pieces(file, 50))) {
      if (event.kind !== 'scan') continue;
      const text = new TextDecoder().decode(file.subarray(event.byte, event.byte + event.length));
      expect(text).toMatch(new RegExp(`^<spectrum [^]*id="${event.scan.id}"[^]*</spectrum>$`));
    }
    expect.assertions(2);
  });

  it('reports progress and stops when cancelled', async () => {
    const seen: number[] = [];
    await readBytes(indexedFile(), { onProgress: (bytes) => seen.push(bytes) }, 1000);
    expect(seen.at(-1)).toBe(indexedFile().length);
    await expect(readBytes(indexedFile(), { isCancelled: () => true })).rejects.toMatchObject({ code: 'cancelled' });
  });

  it('reads metadata alone', async () => {
    const { scans } = await readBytes(indexedFile(), { peaks: false });
    expect(scans.map((scan) => [scan.peakCount, scan.peaks.mz.length])).toEqual([
      [2, 0],
      [1, 0]
    ]);
  });
});

describe('containers', () => {
  it('reads gzip of one and of several members', async () => {
    const file = indexedFile();
    const { scans } = await readBytes(file);
    expect((await readBytes(gzipSync(file), {}, 100)).scans).toEqual(scans);
    const halves = Buffer.concat([gzipSync(file.subarray(0, 700)), gzipSync(file.subarray(700))]);
    for (const size of [1, 64, 1 << 20]) expect((await readBytes(halves, {}, size)).scans).toEqual(scans);
  });

  it('stops a gzip bomb', async () => {
    const bomb = gzipSync(
      Buffer.concat([Buffer.from('<mzML version="1.1.0"><run><spectrumList>'), Buffer.alloc(30 << 20, 32)])
    );
    await expect(readBytes(bomb)).rejects.toMatchObject({ code: 'inflate-limit' });
  });

  it('gives the complete spectra of a cut gzip file', async () => {
    const text = mzmlText(Array.from({ length: 300 }, (_value, i) => ({ mz: [100 + i, 200.123 + i] })));
    const zipped = gzipSync(text);
    const { scans, summary } = await readBytes(zipped.subarray(0, zipped.length / 2));
    expect(scans.length).toBeGreaterThan(50);
    expect(summary.truncated).toBe(true);
  });

  it.each(['iso-8859-1', 'utf-8', 'utf-16le'])('honours the encoding %s', async (encoding) => {
    const text = mzmlText([{ id: 'Prüfung=1' }], { declaration: `<?xml version="1.0" encoding="${encoding}"?>` });
    const nodeName = encoding === 'iso-8859-1' ? 'latin1' : encoding === 'utf-8' ? 'utf8' : 'utf16le';
    const { scans } = await readBytes(Buffer.from((encoding === 'utf-16le' ? '\ufeff' : '') + text, nodeName));
    expect(scans[0].id).toBe('Prüfung=1');
  });

  it('reads a namespace prefix, a byte order mark, comments and CDATA with tags inside', async () => {
    const text = mzmlText([{ inside: '<!-- <spectrum id="no"> --><![CDATA[</spectrum>]]>' }]);
    const prefixed = text.replace(/<(\/?)([a-zA-Z])/g, '<$1m:$2').replace('<m:mzML xmlns=', '<m:mzML xmlns:m=');
    const { scans } = await readText('\ufeff' + prefixed);
    expect(scans.map((scan) => [...scan.peaks.mz])).toEqual([[100, 200]]);
  });

  it('takes ">" and single quotes in attribute values', async () => {
    const { scans } = await readText(mzmlText([{ id: 'a>b', inside: "<userParam name='x' value='</spectrum>'/>" }]));
    expect(scans[0].id).toBe('a>b');
  });

  it('warns of an index that leads nowhere and reads all the same', async () => {
    const file = Buffer.from(indexedFile()).toString('latin1');
    const { scans, summary } = await readText(file.replace(/(<offset idRef="scan=2">)(\d+)/, '$17'));
    expect(scans).toHaveLength(2);
    const [warning] = summary.warnings.filter(({ code }) => code === 'wrong-index');
    expect(warning.message).toMatch(/for 1 of its 2 entries/);
    for (const size of [1, 13, 500]) {
      const right = await readBytes(indexedFile(), {}, size);
      expect(codes(right.summary.warnings)).not.toContain('wrong-index');
    }
  });

  it('warns of a wrong checksum and reads all the same', async () => {
    const text = new TextDecoder().decode(indexedFile()).replace('id="run"', 'id="ran"');
    const { scans, summary } = await readText(text, { sha1 });
    expect(scans).toHaveLength(2);
    expect(summary.checksum).toBe('mismatch');
    expect(codes(summary.warnings)).toContain('checksum');
  });
});

describe('refusals', () => {
  it.each([
    ['empty', ''],
    ['not-mzml', 'just text'],
    ['not-mzml', '<html><body/></html>'],
    ['not-mzml', '   '],
    ['doctype', '<!DOCTYPE mzML [<!ENTITY a "b">]><mzML version="1.1.0"/>'],
    ['unsupported-version', mzmlText([{}], { version: '0.99.1' })],
    ['no-spectra', mzmlText([])],
    ['truncated', mzmlText([{}]).slice(0, 200)],
    ['doctype', mzmlText([{ id: '&lol;' }])]
  ])('%s', async (code, text) => {
    await expect(readText(text)).rejects.toMatchObject({ name: 'CoreError', code });
  });

  it('names the kind of foreign file', async () => {
    await expect(readBytes(Uint8Array.of(0x50, 0x4b, 3, 4, 0, 0))).rejects.toThrow(/ZIP/);
    await expect(readText('<mzXML/>')).rejects.toThrow(/mzXML/);
  });

  it('bounds depth, spectrum and head', async () => {
    await expect(readText(mzmlText([{ inside: '<a>'.repeat(70) + '</a>'.repeat(70) }]))).rejects.toMatchObject({
      code: 'limit'
    });
    await expect(readBytes(bytesOf(mzmlText([{}])), { limits: { spectrumBytes: 100 } }, 50)).rejects.toMatchObject({
      code: 'limit'
    });
    await expect(
      readBytes(bytesOf(mzmlText([{}], { head: ' '.repeat(500) })), { limits: { headBytes: 100 } }, 50)
    ).rejects.toMatchObject({ code: 'limit' });
  });

  it('reads a spectrum of several megabytes, in any pieces', async () => {
    const mz = Array.from({ length: 300_000 }, (_v, i) => 100 + i / 300);
    const file = bytesOf(mzmlText([{ mz }, {}]));
    expect(file.length).toBeGreaterThan(6e6);
    for (const size of [1 << 16, 1 << 20]) {
      const { scans } = await readBytes(file, { centroid: false }, size);
      expect(scans.map((scan) => scan.peakCount)).toEqual([300_000, 2]);
    }
  });

  it('bounds the length of a tag and the number of broken spectra', async () => {
    const long = mzmlText([{}]).replace('<binary>', `<binary a="${'x'.repeat(3e6)}"`);
    await expect(readText(long)).rejects.toMatchObject({ code: 'limit' });
    const broken = mzmlText([{}]).replace('<spectrum ', '<spectrum>'.repeat(200) + '<spectrum ');
    await expect(readText(broken, { limits: { failures: 100 } })).rejects.toMatchObject({ code: 'limit' });
    expect((await readText(broken)).scans).toHaveLength(1);
  });

  it('takes about as long for small pieces as for large ones, whatever is begun and never ended', async () => {
    const cut = mzmlText([{}]).replace('<binary>', `<!-- ${'>'.repeat(1e6)}`);
    const start = performance.now();
    const { summary } = await readBytes(bytesOf(mzmlText([{}]).replace('</spectrumList>', cut)), {}, 500);
    expect(summary.truncated).toBe(true);
    // Looking at every byte again with every piece would take a thousand times as long.
    expect(performance.now() - start).toBeLessThan(5000);
  });

  it('refuses an array that inflates far beyond its declared length', async () => {
    const bomb = {
      terms: ['MS:1000523', 'MS:1000574', 'MS:1000514'],
      text: deflateSync(Buffer.alloc(8 << 20)).toString('base64')
    };
    const bad = mzmlText([{ length: 2, arrays: [bomb, plainArray('intensity', [1, 2])] }]);
    await expect(readText(bad)).rejects.toMatchObject({ code: 'inflate-limit', place: { scan: 'scan=1' } });
  });
});

describe('spectra that cannot be used', () => {
  it.each([
    ['bad-base64', { terms: ['MS:1000523', 'MS:1000514'], text: '!!!!' }],
    ['bad-array', { terms: ['MS:1000523', 'MS:1000514'], text: 'AAAA' }],
    ['bad-array', { terms: ['MS:1000514'], text: doubles([1, 2]) }],
    ['bad-array', { terms: ['MS:1000523', 'MS:1000574', 'MS:1000514'], text: doubles([1, 2]) }],
    ['unsupported-compression', { terms: ['MS:1000523', 'MS:1003780', 'MS:1000514'], text: doubles([1, 2]) }]
  ])('%s is left out with a warning, or is the error when nothing else is there', async (code, array) => {
    const bad = { id: 'bad', length: 2, arrays: [array, plainArray('intensity', [1, 2])] };
    const { scans, summary } = await readText(mzmlText([{}, bad, {}]));
    expect(scans.map((scan) => scan.index)).toEqual([0, 2]);
    expect(summary.warnings).toMatchObject([{ code, scans: ['bad'], count: 1 }]);
    await expect(readText(mzmlText([bad]))).rejects.toMatchObject({ code, place: { scan: 'bad' } });
  });

  it('goes on behind a spectrum without an end', async () => {
    const text = mzmlText([{}, { id: 'open' }, {}]).replace(/(id="open"[^]*?)<\/spectrum>/, '$1');
    const { scans, summary } = await readText(text);
    expect(scans.map((scan) => scan.id)).toEqual(['scan=1', 'scan=3']);
    expect(codes(summary.warnings)).toEqual(['xml']);
  });

  it('keeps the complete spectra of a truncated file', async () => {
    const text = mzmlText([{}, {}, {}]);
    const { scans, summary } = await readText(text.slice(0, text.lastIndexOf('<binary>')));
    expect(scans).toHaveLength(2);
    expect(summary.truncated).toBe(true);
    expect(codes(summary.warnings)).toContain('truncated');
  });

  it('takes a decimal comma as an error', async () => {
    const params = cv('MS:1000511', 1) + cv('MS:1000285', '1,5');
    await expect(readText(mzmlText([{ params }]))).rejects.toMatchObject({ code: 'bad-number' });
  });

  it('never throws anything but CoreError for damaged bytes', async () => {
    const file = bytesOf(mzmlText([{}, { inside: '<precursorList count="1"><precursor/></precursorList>' }, {}]));
    let seed = 7;
    const random = (below: number): number => (seed = (Math.imul(seed, 1664525) + 1013904223) >>> 0) % below;
    let failures = 0;
    for (let round = 0; round < 400; round++) {
      const damaged = file.slice(0, random(4) === 0 ? random(file.length) : file.length);
      for (let k = 0; k <= random(6); k++) damaged[random(Math.max(1, damaged.length))] = random(256);
      const error: unknown = await readBytes(damaged, {}, 64 + random(400)).then(
        () => null,
        (reason: unknown) => reason
      );
      if (error) failures++;
      expect(error === null || (error instanceof Error && error.name === 'CoreError')).toBe(true);
    }
    expect(failures).toBeGreaterThan(20);
  });
});

describe('peaks', () => {
  it('sorts unsorted m/z together with the intensities', async () => {
    const { scans, summary } = await readText(mzmlText([{ mz: [300, 100, 200], intensity: [3, 1, 2] }]));
    expect([...scans[0].peaks.mz]).toEqual([100, 200, 300]);
    expect([...scans[0].peaks.intensity]).toEqual([1, 2, 3]);
    expect(codes(summary.warnings)).toEqual(['unsorted']);
  });

  it('leaves out impossible values and cuts unequal lengths', async () => {
    const { scans, summary } = await readText(
      mzmlText([
        { mz: [100, NaN, 300, -4], intensity: [1, 2, Infinity, 3] },
        { mz: [100, 200], intensity: [1] }
      ])
    );
    expect(scans.map((scan) => [...scan.peaks.mz])).toEqual([[100], [100]]);
    expect(codes(summary.warnings)).toEqual(['impossible-values', 'array-lengths']);
  });

  it('reads 32-bit and integer arrays, and passes over the others', async () => {
    const arrays = [
      { terms: ['MS:1001479', 'MS:1000786'], text: 'MTAwAA==' },
      { terms: ['MS:1000519', 'MS:1000514'], text: Buffer.from(Int32Array.of(100, 200).buffer).toString('base64') },
      { terms: ['MS:1000522', 'MS:1000515'], text: Buffer.from(BigInt64Array.of(7n, 8n).buffer).toString('base64') },
      { terms: ['MS:1003780', 'MS:1000517'], text: '!!!' }
    ];
    const { scans } = await readText(mzmlText([{ length: 2, arrays }]));
    expect([...scans[0].peaks.mz, ...scans[0].peaks.intensity]).toEqual([100, 200, 7, 8]);
  });

  it('takes empty spectra, with and without arrays', async () => {
    const empty = [
      { mz: [] },
      { mz: [], arrays: [] },
      { mz: [], arrays: [{ terms: ['MS:1000523', 'MS:1000574', 'MS:1000514'], text: 'eJwDAAAAAAE=' }] }
    ];
    const { scans } = await readText(mzmlText(empty));
    expect(scans.map((scan) => scan.peakCount)).toEqual([0, 0, 0]);
  });
});
