import { gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { fixtures } from '../../../../tests/fuzz/fixtures';
import { mzmlText, readBytes } from '../../../../tests/helpers/mzml-text';
import { RandomAccessRun, type RandomAccessSource } from '.';

/** Counts the bytes that are read. */
class Source implements RandomAccessSource {
  taken = 0;

  constructor(private readonly bytes: Uint8Array) {}

  get size(): number {
    return this.bytes.length;
  }

  async read(offset: number, length: number): Promise<Uint8Array> {
    if (offset < 0 || length < 0 || offset + length > this.size) throw new RangeError('outside the source');
    this.taken += length;
    return this.bytes.slice(offset, offset + length);
  }
}

const indexed = () => fixtures().get('written indexed') ?? Buffer.alloc(0);
const codes = (run: RandomAccessRun) => run.warnings.map((warning) => warning.code);

/** Every offset of the index changed by `shift`. */
const shifted = (file: Buffer, shift: number) =>
  Buffer.from(
    file.toString('latin1').replace(/(<offset [^>]*>)(\d+)/g, (_all, tag, n) => `${tag}${Number(n) + shift}`),
    'latin1'
  );

describe('RandomAccessRun', () => {
  it.each([...fixtures()])('opens every scan as the whole reading gives it, in any order: %s', async (_name, file) => {
    const { scans } = await readBytes(file);
    const run = await RandomAccessRun.open(new Source(file));
    expect(run.entries.map((entry) => entry.id)).toEqual(scans.map((scan) => scan.id));
    for (const scan of [...scans].reverse()) expect(await run.scan(scan.id)).toEqual(scan);
    for (const quick of [false, true]) {
      const again = await RandomAccessRun.open(new Source(file), { quick });
      expect(await again.scan(scans[scans.length - 1].id)).toEqual(scans[scans.length - 1]);
    }
  });

  it('reads only the head, the index and some spectra', async () => {
    const spectra = Array.from({ length: 400 }, (_v, i) => ({
      mz: Array.from({ length: 400 }, (_w, k) => 100 + i + k)
    }));
    const text = mzmlText(spectra).replace('<mzML', '<indexedmzML><mzML');
    const offsets = [...text.matchAll(/<spectrum .*?id="(.*?)"/g)].map((found) => [found[1], found.index] as const);
    const list = offsets.map(([id, byte]) => `<offset idRef="${id}">${byte}</offset>`).join('\n');
    const index = `\n<indexList count="1"><index name="spectrum">${list}</index></indexList>`;
    const file = Buffer.from(`${text}${index}<indexListOffset>${text.length}</indexListOffset></indexedmzML>`);
    const source = new Source(file);
    const run = await RandomAccessRun.open(source);
    expect([run.origin, run.entries.length]).toEqual(['file', 400]);
    expect((await run.scan('scan=200')).peaks.mz[0]).toBe(299);
    expect(source.taken).toBeLessThan(file.length / 3);
  });

  it.each([
    ['offsets that are all wrong', (file: Buffer) => shifted(file, 3)],
    [
      'offsets that exchange two spectra',
      (file: Buffer) =>
        Buffer.from(
          file.toString('latin1').replace('idRef="controllerType=0 controllerNumber=1 scan=1"', 'idRef="x"'),
          'latin1'
        )
    ],
    ['offsets outside the file', (file: Buffer) => shifted(file, 1e9)],
    [
      'an index that begins elsewhere',
      (file: Buffer) =>
        Buffer.from(file.toString('latin1').replace(/<indexListOffset>\d+/, '<indexListOffset>100'), 'latin1')
    ],
    ['a file cut in its index', (file: Buffer) => file.subarray(0, file.length - 200)]
  ])('makes the index anew for %s', async (_name, damage) => {
    const file = damage(indexed());
    const { scans } = await readBytes(file);
    const run = await RandomAccessRun.open(new Source(file));
    expect([run.origin, codes(run)]).toEqual(['rebuilt', ['index']]);
    for (const scan of scans) expect(await run.scan(scan.id)).toEqual(scan);
  });

  it('makes the index anew when a scan is not where the index says, and keeps it', async () => {
    const file = Buffer.from(
      indexed()
        .toString('latin1')
        .replace(/(scan=6">)\d+/, '$1' + indexed().indexOf('<binary>')),
      'latin1'
    );
    const source = new Source(file);
    const run = await RandomAccessRun.open(source);
    const ids = run.entries.map((entry) => entry.id);
    expect(await run.scan(ids[5])).toMatchObject({ id: ids[5], index: 5 });
    expect(run.origin).toBe('rebuilt');
    const { taken } = source;
    await run.scan(ids[4]);
    expect(source.taken - taken).toBeLessThan(file.length);
  });

  it('says that a scan is not there', async () => {
    const run = await RandomAccessRun.open(new Source(indexed()));
    await expect(run.scan('scan=none')).rejects.toMatchObject({ code: 'no-spectra', place: { scan: 'scan=none' } });
  });

  it('refuses what has no places to go to', async () => {
    const open = (bytes: Uint8Array) => RandomAccessRun.open(new Source(bytes));
    await expect(open(gzipSync(indexed()))).rejects.toMatchObject({ code: 'unsupported-compression' });
    await expect(open(Buffer.from('\ufeff<mzML/>', 'utf16le'))).rejects.toMatchObject({ code: 'xml' });
    await expect(open(Buffer.alloc(0))).rejects.toMatchObject({ code: 'empty' });
    await expect(open(Buffer.from('<html/>'))).rejects.toMatchObject({ code: 'not-mzml' });
    await expect(open(Buffer.from('<mzML version="1.1.0"><run>'))).rejects.toMatchObject({ code: 'truncated' });
  });
});
