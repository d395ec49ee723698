import { describe, expect, it } from 'vitest';
import { NOTHING_SELECTED, readSelection, writeSelection, type Selection } from './selection';

const read = (query: string) => readSelection(new URLSearchParams(query));

describe('selection in the URL', () => {
  it('comes back as it was written', () => {
    const selection: Selection = { ion: 412, spectrum: null, lane: 'all', zoom: { from: 120.5, to: 210 } };
    expect(read(writeSelection(selection, ''))).toEqual(selection);
    const lane: Selection = { ...NOTHING_SELECTED, spectrum: 0 };
    expect(read(writeSelection(lane, ''))).toEqual(lane);
  });
  it('leaves no trace of nothing and keeps foreign parameters', () => {
    expect(writeSelection(NOTHING_SELECTED, 'ion=4&from=1&to=2')).toBe('');
    expect(writeSelection(NOTHING_SELECTED, 'ion=4&revision=2')).toBe('?revision=2');
  });
  it('takes nonsense for nothing', () => {
    expect(read('ion=-3&spectrum=1.5&lane=x&from=200&to=100')).toEqual(NOTHING_SELECTED);
    expect(read('ion=abc&from=&to=100')).toEqual(NOTHING_SELECTED);
  });
});
