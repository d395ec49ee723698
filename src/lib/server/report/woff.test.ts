import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { describe, expect, it } from 'vitest';
import { unpackWoff } from './woff';

const require = createRequire(import.meta.url);
const path = require.resolve('@ibm/plex-mono/package.json').replace('package.json', 'fonts/complete/woff/');
const font = unpackWoff(readFileSync(`${path}IBMPlexMono-Regular.woff`));

/** Sum of a table's 32-bit words, zero-padded, as the OpenType specification defines the checksum. */
function checksum(at: number, length: number): number {
  let sum = 0;
  for (let i = 0; i < length; i += 4) {
    const word = Buffer.alloc(4);
    font.copy(word, 0, at + i, Math.min(at + i + 4, at + length));
    sum = (sum + word.readUInt32BE()) >>> 0;
  }
  return sum;
}

describe('unpackWoff', () => {
  it('gives an sfnt whose tables fit their own checksums', () => {
    expect(font.readUInt32BE(0)).toBe(0x00010000);
    const tables = font.readUInt16BE(4);
    expect(tables).toBeGreaterThan(8);
    for (let i = 0; i < tables; i++) {
      const at = 12 + i * 16;
      const tag = font.toString('latin1', at, at + 4);
      // The checksum of 'head' is computed with its own adjustment field set to zero; the others stand as they are.
      if (tag !== 'head')
        expect([tag, checksum(font.readUInt32BE(at + 8), font.readUInt32BE(at + 12))]).toEqual([
          tag,
          font.readUInt32BE(at + 4)
        ]);
    }
  });

  it('refuses what is no WOFF file', () => {
    expect(() => unpackWoff(Buffer.from('wOF2'.padEnd(60)))).toThrow(RangeError);
    expect(() => unpackWoff(Buffer.alloc(0))).toThrow(RangeError);
  });
});
