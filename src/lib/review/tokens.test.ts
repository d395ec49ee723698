import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { paragraphs, tokenise } from './tokens';

const marked = (text: string) =>
  tokenise(text)
    .filter((t) => t.kind !== 'text')
    .map((t) => `${t.kind}:${t.text}`);

describe('tokenise', () => {
  it.each([
    ['Loss of C5H7NO from 301.1547 needs the ring to open.', ['formula:C5H7NO', 'mz:301.1547']],
    ['CO or N2, or C2H4?', ['formula:CO', 'formula:N2', 'formula:C2H4']],
    ['HCN is lost at 204.10.', ['formula:HCN', 'mz:204.10']],
    ['C17H21Cl2N2O3', ['formula:C17H21Cl2N2O3']],
    ['Is 204 seen in MS3? No, in CID 35 only.', []],
    ['Version 1.2.3456 and 10.1021/es5002105', []],
    ['In He I see NO reason', []]
  ])('%s', (text, expected) => {
    expect(marked(text)).toEqual(expected);
  });

  it('loses no character of any text', () => {
    fc.assert(
      fc.property(fc.string(), (text) => {
        expect(
          tokenise(text)
            .map((t) => t.text)
            .join('')
        ).toBe(text);
      })
    );
  });

  it('keeps markup as text', () => {
    expect(tokenise('<b>C2H4</b>').map((t) => t.text)).toEqual(['<b>', 'C2H4', '</b>']);
  });
});

describe('paragraphs', () => {
  it('parts at blank lines and keeps single breaks', () => {
    expect(paragraphs('one\r\ntwo\r\n\r\n\r\nthree\n')).toEqual(['one\ntwo', 'three']);
  });
});
