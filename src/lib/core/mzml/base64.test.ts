import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { decodeBase64, encodeBase64 } from './base64';

const text = (value: string) => new TextEncoder().encode(value);
const decoded = (value: string) => new TextDecoder().decode(decodeBase64(text(value)));

describe('base64', () => {
  // RFC 4648, section 10, test vectors.
  it.each([
    ['', ''],
    ['Zg==', 'f'],
    ['Zm8=', 'fo'],
    ['Zm9v', 'foo'],
    ['Zm9vYg==', 'foob'],
    ['Zm9vYmE=', 'fooba'],
    ['Zm9vYmFy', 'foobar']
  ])('decodes %s', (encoded, plain) => {
    expect(decoded(encoded)).toBe(plain);
    expect(new TextDecoder().decode(encodeBase64(text(plain)))).toBe(encoded);
  });

  it('passes over white space and takes missing padding', () => {
    expect(decoded(' Zm9v\r\n\tYm Fy\n')).toBe('foobar');
    expect(decoded('Zm9vYg')).toBe('foob');
  });

  it.each(['Zm9v!mFy', 'Zg==Zg==', 'Z', 'Zm9vY===', 'Zm8-'])('refuses %s', (wrong) => {
    expect(() => decoded(wrong)).toThrow(/Base64/);
  });

  it('gives back any bytes, as Node encodes them', () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 200 }), (bytes) => {
        const encoded = encodeBase64(bytes);
        expect(new TextDecoder().decode(encoded)).toBe(Buffer.from(bytes).toString('base64'));
        expect([...decodeBase64(encoded)]).toEqual([...bytes]);
      })
    );
  });
});
