import { gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { mzmlText, readBytes } from '../../../tests/helpers/mzml-text';
import { decodeBase64 } from '../core/mzml/base64';
import { base64, gunzip, nodeReading } from './reading';

async function* inPieces(bytes: Uint8Array, size: number): AsyncGenerator<Uint8Array> {
  for (let at = 0; at < bytes.length; at += size) yield bytes.subarray(at, at + size);
}

async function gunzipped(bytes: Uint8Array, size = 1000): Promise<string> {
  const parts: Uint8Array[] = [];
  for await (const part of gunzip(inPieces(bytes, size))) parts.push(part);
  return Buffer.concat(parts).toString('latin1');
}

describe('base64', () => {
  it('decodes plain text as the reader itself does', () => {
    for (let length = 0; length < 50; length++) {
      const text = Buffer.from(Array.from({ length }, (_v, i) => (i * 89) & 255)).toString('base64');
      expect(new Uint8Array(base64(text) ?? [])).toEqual(decodeBase64(Buffer.from(text)));
    }
  });

  it.each(['AAA', 'AA-A', 'AA_A', 'AA A', 'A=AA', 'AAA\u0000', 'AAAA====', '====', 'AA!A', 'AAA=AAAA'])(
    'declines %j, which the reader judges by itself',
    (text) => {
      expect(base64(text)).toBeNull();
    }
  );
});

describe('gunzip', () => {
  const text = 'x,y;'.repeat(50_000);

  it('reads all members, whatever the pieces', async () => {
    const zipped = Buffer.concat([gzipSync(text.slice(0, 7)), gzipSync(text.slice(7))]);
    for (const size of [1, 100, 1 << 20]) expect(await gunzipped(zipped, size)).toBe(text);
  });

  it('gives what comes before a cut', async () => {
    const zipped = gzipSync(text);
    const read = await gunzipped(zipped.subarray(0, zipped.length - 60));
    expect(read.length).toBeGreaterThan(1000);
    expect(text.startsWith(read)).toBe(true);
  });

  it('takes damage as a typed error behind what came before', async () => {
    const zipped = gzipSync(text);
    zipped[zipped.length - 8] ^= 1;
    await expect(gunzipped(zipped)).rejects.toMatchObject({ code: 'truncated' });
  });

  it('lets the reader use the scans before the damage, with a warning', async () => {
    const file = mzmlText(Array.from({ length: 300 }, (_v, i) => ({ mz: [100 + i, 200.123 + i] })));
    const zipped = gzipSync(file);
    zipped.fill(0, zipped.length - 300, zipped.length - 200);
    const { scans, summary } = await readBytes(zipped, nodeReading);
    expect(scans.length).toBeGreaterThan(100);
    expect(summary.warnings).toContainEqual(expect.objectContaining({ code: 'damaged-gzip' }));
  });
});
