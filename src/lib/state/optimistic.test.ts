import { describe, expect, it } from 'vitest';
import type { IonColumns, WorkbenchView } from '$lib/schema/workbench';
import { ionItems } from './ion-rows';
import { applyResult, expectDecisions, patchColumns } from './optimistic';

const ions: IonColumns = {
  strings: ['C12H14NO2', 'C5H7NO'],
  id: [7, 8],
  spectrum: [0, 0],
  mz: [204.1019, 301.1547],
  intensity: [50, 100],
  scans: [3, 3],
  state: 'po',
  formula: [0, -1],
  charge: [1, 1],
  errorPpm: [0.2, null],
  dbe: [6.5, null],
  loss: [1, -1],
  fromMz: [301.1547, null],
  fromFormula: [-1, -1],
  bits: [2, 0],
  flag: [-1, -1],
  score: [14.2, null],
  version: [1, 4],
  reasons: { 8: 'noise?' }
};
const view = {
  tree: { version: 3, explained: 0.5, status: 'draft' },
  ions,
  remarks: { open: 1, tree: 0, spectra: {}, ions: { 8: 1 } }
} as unknown as WorkbenchView;

describe('ionItems', () => {
  it('unpacks states, links and shares, and marks disputed ions', () => {
    const [first, second] = ionItems(view);
    expect(first).toMatchObject({ state: 'proposed', mark: 'proposed', formula: 'C12H14NO2', link: 'measured' });
    expect(first.relative).toBe(50);
    expect(second).toMatchObject({ state: 'open', mark: 'disputed', formula: null, reason: 'noise?' });
  });
});

describe('expectDecisions', () => {
  it('shows a confirmation at once, with the version the server will give', () => {
    const [ion] = ionItems(expectDecisions(view, [{ ionId: 7, version: 1, action: 'confirm' }]));
    expect(ion).toMatchObject({ state: 'confirmed', version: 2, formula: 'C12H14NO2', decided: true });
  });
  it('takes the formula off an ion left open', () => {
    const after = expectDecisions(view, [{ ionId: 7, version: 1, action: 'open', reason: 'overlap' }]);
    expect(ionItems(after)[0]).toMatchObject({ state: 'open', formula: null, link: null, reason: 'overlap' });
  });
  it('leaves the view before untouched, so that it can be restored', () => {
    const before = structuredClone(ions);
    expectDecisions(view, [{ ionId: 7, version: 1, action: 'confirm', formula: 'C8H14NO5' }]);
    expect(ions).toEqual(before);
  });
});

describe('applyResult', () => {
  it('takes over what the server says', () => {
    const after = applyResult(view, {
      treeVersion: 9,
      explained: 0.75,
      status: 'draft',
      ions: [
        {
          ...{ id: 8, version: 5, state: 'confirmed', formula: 'C17H21N2O3', errorPpm: -0.1, dbe: 8.5 },
          ...{ oddElectron: false, loss: 'C2H4O2', lossRadical: false, fromMz: 361.1758, fromFormula: 'C19H25N2O5' },
          ...{ link: 'inferred', score: null, reason: null, decided: true }
        }
      ]
    });
    expect(after.tree).toMatchObject({ version: 9, explained: 0.75 });
    expect(ionItems(after)[1]).toMatchObject({ version: 5, formula: 'C17H21N2O3', link: 'inferred', reason: null });
  });
  it('ignores ions that the view does not hold', () => {
    expect(patchColumns(ions, [{ id: 99, version: 2 }]).version).toEqual([1, 4]);
  });
});
