import { describe, expect, it } from 'vitest';
import { sampleContent } from '../sample';
import { methodsText } from './methods';
import { proseParts } from './prose';

const tree = { formula: 'C8H10N4O2', adduct: '[M+H]+' };

describe('proseParts', () => {
  it('marks stages, m/z, formula and ion type', () => {
    expect(proseParts('MS2 at m/z 5: C8H10N4O2 ([M+H]+).', tree)).toEqual([
      { kind: 'stage', text: 'MS2' },
      { kind: 'text', text: ' at ' },
      { kind: 'mz', text: 'm/z' },
      { kind: 'text', text: ' 5: ' },
      { kind: 'formula', text: 'C8H10N4O2' },
      { kind: 'text', text: ' (' },
      { kind: 'ion-type', text: '[M+H]+' },
      { kind: 'text', text: ').' }
    ]);
  });

  it('leaves file names alone and loses no character', () => {
    expect(proseParts('C8H10N4O2-f7.mzML', tree)).toEqual([{ kind: 'text', text: 'C8H10N4O2-f7.mzML' }]);
    for (const text of methodsText(sampleContent()))
      expect(
        proseParts(text, tree)
          .map((p) => p.text)
          .join('')
      ).toBe(text);
  });
});
