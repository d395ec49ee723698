import { describe, expect, it } from 'vitest';
import { canonicalJson, fixed, significant } from './canonical';

describe('canonicalJson', () => {
  it('serialises the sample of RFC 8785, section 3.2.3', () => {
    const sample = {
      numbers: [333333333.3333333, 1e30, 4.5, 2e-3, 0.000000000000000000000000001],
      string: '\u20ac$\u000F\u000aA\'\u0042\u0022\u005c\\"/',
      literals: [null, true, false]
    };
    expect(canonicalJson(sample)).toBe(
      '{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27],' +
        '"string":"€$\\u000f\\nA\'B\\"\\\\\\\\\\"/"}'
    );
  });

  it('sorts members by UTF-16 code units as the sample of RFC 8785, section 3.2.3', () => {
    const sample = {
      '\u20ac': 'Euro Sign',
      '\r': 'Carriage Return',
      '\ufb33': 'Hebrew Letter Dalet With Dagesh',
      '1': 'One',
      '\ud83d\ude00': 'Emoji: Grinning Face',
      '\u0080': 'Control',
      '\u00f6': 'Latin Small Letter O With Diaeresis'
    };
    const values = [...canonicalJson(sample).matchAll(/":"([^"]*)"/g)].map((m) => m[1]);
    expect(values).toEqual([
      'Carriage Return',
      'One',
      'Control',
      'Latin Small Letter O With Diaeresis',
      'Euro Sign',
      'Emoji: Grinning Face',
      'Hebrew Letter Dalet With Dagesh'
    ]);
  });

  it('gives equal text for equal content in any order and leaves absent members out', () => {
    expect(canonicalJson({ b: [{ d: 1, c: 2 }], a: undefined })).toBe(canonicalJson({ b: [{ c: 2, d: 1 }] }));
  });

  it('writes minus zero as 0', () => {
    expect(canonicalJson([-0])).toBe('[0]');
  });

  it.each([NaN, Infinity, undefined, () => 1, '\ud800'])('refuses %s', (value) => {
    expect(() => canonicalJson([value])).toThrow(TypeError);
  });
});

describe('rounding', () => {
  it('keeps null and rounds to decimals', () => {
    expect([fixed(null, 4), fixed(195.08765432, 6), fixed(-0.00000001, 6)]).toEqual([null, 195.087654, -0]);
  });

  it('rounds to significant digits', () => {
    expect(significant(1234567.89, 6)).toBe(1234570);
  });
});
