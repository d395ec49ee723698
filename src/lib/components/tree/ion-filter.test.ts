import { describe, expect, it } from 'vitest';
import type { IonItem } from '$lib/state/ion-rows';
import { filterIons, NO_FILTER, sortIons } from './ion-filter';

const ion = (id: number, mz: number, formula: string | null, over: Partial<IonItem> = {}): IonItem => ({
  ...{ id, spectrum: 0, mz, intensity: id, relative: id, scans: 1, state: 'proposed', mark: 'proposed', formula },
  ...{ charge: 1, errorPpm: formula ? id - 2 : null, dbe: null, oddElectron: false, loss: null, lossRadical: false },
  ...{ fromMz: null, fromFormula: null, link: null, isPrecursor: false, flag: null, score: null, version: 1 },
  ...{ reason: null, decided: false },
  ...over
});
const ions = [
  ion(1, 204.1019, 'C12H14NO2', { mark: 'disputed' }),
  ion(2, 124.0757, 'C7H10NO', { loss: 'C10H11NO2' }),
  ion(3, 258.149, null, { state: 'open', mark: 'open' })
];
const ids = (list: IonItem[]) => list.map((i) => i.id);

describe('filterIons', () => {
  it('passes everything without a filter', () => {
    expect(filterIons(ions, NO_FILTER)).toHaveLength(3);
  });
  it('finds a disputed ion by either of its states', () => {
    expect(ids(filterIons(ions, { ...NO_FILTER, state: 'disputed' }))).toEqual([1]);
    expect(ids(filterIons(ions, { ...NO_FILTER, state: 'proposed' }))).toEqual([1, 2]);
  });
  it('looks into formulas, losses and the beginning of the m/z', () => {
    expect(ids(filterIons(ions, { ...NO_FILTER, text: 'NO2' }))).toEqual([1, 2]);
    expect(ids(filterIons(ions, { ...NO_FILTER, text: '258' }))).toEqual([3]);
    expect(ids(filterIons(ions, { ...NO_FILTER, text: 'no2' }))).toEqual([]);
  });
  it('keeps to the m/z range', () => {
    expect(ids(filterIons(ions, { ...NO_FILTER, from: 200, to: 210 }))).toEqual([1]);
  });
});

describe('sortIons', () => {
  it('sorts both ways', () => {
    expect(ids(sortIons(ions, 'mz', true))).toEqual([3, 1, 2]);
    expect(ids(sortIons(ions, 'intensity', false))).toEqual([1, 2, 3]);
  });
  it('puts ions without the value last in both directions', () => {
    expect(ids(sortIons(ions, 'error', false))).toEqual([1, 2, 3]);
    expect(ids(sortIons(ions, 'error', true))).toEqual([2, 1, 3]);
  });
  it('does not change the list given', () => {
    sortIons(ions, 'mz', true);
    expect(ids(ions)).toEqual([1, 2, 3]);
  });
});
