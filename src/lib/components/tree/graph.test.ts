import { describe, expect, it } from 'vitest';
import type { IonItem } from '$lib/state/ion-rows';
import { directionOf, layOut, STEPS, zoomToShow } from './graph-layout';
import { branchesOf, graphOf, mainIons } from './graph-model';

let nextId = 1;
const ion = (
  formula: string,
  mz: number,
  from: [string, number, string] | null,
  over: Partial<IonItem> = {}
): IonItem => ({
  ...{ id: nextId++, spectrum: 0, mz, intensity: 1, relative: 50, scans: 1, state: 'proposed', mark: 'proposed' },
  ...{ formula, charge: 1, errorPpm: 0, dbe: 1, oddElectron: false, loss: from?.[2] ?? null, lossRadical: false },
  ...{ fromMz: from?.[1] ?? null, fromFormula: from?.[0] ?? null, link: from ? 'measured' : null, isPrecursor: !from },
  ...{ flag: null, score: 1, version: 1, reason: null, decided: false },
  ...over
});
const top = ion('C19H25N2O5', 361.18, null);
const middle = ion('C17H21N2O3', 301.15, ['C19H25N2O5', 361.18, 'C2H4O2']);
const low = ion('C12H14NO2', 204.1, ['C17H21N2O3', 301.15, 'C5H7NO'], { spectrum: 1 });
const lowAbove = ion('C12H14NO2', 204.1, ['C19H25N2O5', 361.18, 'C7H11NO3'], { relative: 90 });

describe('mainIons', () => {
  const weak = ion('C5H8N', 82.07, ['C12H14NO2', 204.1, 'C7H6O2'], { relative: 0.4 });
  const formulas = (ions: IonItem[]) => [...new Set(ions.map((item) => item.formula))].sort();

  it('keeps the isolated and the strongest with the chain that they hang on', () => {
    expect(formulas(mainIons([top, middle, { ...low, relative: 95 }, weak], 2, null))).toEqual(
      ['C12H14NO2', 'C17H21N2O3', 'C19H25N2O5'].sort()
    );
  });
  it('keeps the selected ion however weak, and nothing rejected', () => {
    expect(formulas(mainIons([top, middle, low, weak], 1, weak.id))).toContain('C5H8N');
    expect(mainIons([{ ...low, state: 'rejected' }], 5, null)).toEqual([]);
  });
});

describe('graphOf', () => {
  it('joins the ions of one formula to one node, told by its strongest ion', () => {
    const { nodes } = graphOf([top, middle, low, lowAbove]);
    expect(nodes.map((n) => n.formula)).toEqual(['C19H25N2O5', 'C17H21N2O3', 'C12H14NO2']);
    expect(nodes[2].ionIds).toEqual([low.id, lowAbove.id]);
    expect(nodes[2].ionId).toBe(lowAbove.id);
  });
  it('shows the gravest state of its ions', () => {
    const { nodes } = graphOf([low, { ...lowAbove, state: 'confirmed', mark: 'disputed' }]);
    expect(nodes.find((n) => n.formula === 'C12H14NO2')?.mark).toBe('disputed');
  });
  it('places a node by the measured edge from the lightest ion and drops spare inferred ones', () => {
    const spare = ion('C12H14NO2', 204.1, ['C18H20NO3', 298.1, 'C6H6O'], { link: 'inferred' });
    const { edges } = graphOf([top, middle, low, lowAbove, spare]);
    expect(edges.filter((e) => e.primary && e.to.startsWith('C12H14NO2')).map((e) => e.loss)).toEqual(['C5H7NO']);
    expect(edges.some((e) => e.loss === 'C6H6O')).toBe(false);
    expect(edges.some((e) => e.loss === 'C7H11NO3')).toBe(true);
  });
  it('leaves out open and rejected ions, and names origins that were not seen', () => {
    const { nodes } = graphOf([{ ...middle, state: 'rejected' }, low]);
    expect(nodes.map((n) => [n.formula, n.mark])).toEqual([
      ['C17H21N2O3', 'unseen'],
      ['C12H14NO2', 'proposed']
    ]);
  });
});

describe('branchesOf', () => {
  it('survives edges that close a ring', () => {
    const a = ion('C2H4', 28, ['C3H6', 42, 'CH2']);
    const b = ion('C3H6', 42, ['C2H4', 28, 'CH2']);
    const roots = branchesOf(graphOf([a, b]));
    expect(roots).toHaveLength(1);
    expect(roots[0].children).toHaveLength(1);
  });
});

describe('layOut', () => {
  const leaves = Array.from({ length: 12 }, (_, i) => ion(`C${i + 2}H5`, 30 + 12 * i, ['C19H25N2O5', 361.18, 'X']));
  const wide = branchesOf(graphOf([top, ...leaves]));

  it('puts layer under layer and keeps neighbours apart', () => {
    const roots = branchesOf(graphOf([top, middle, low, ...leaves.slice(0, 3)]));
    const at = [...layOut(roots, 'down').values()];
    for (const a of at)
      for (const b of at)
        if (a !== b && a.y === b.y) expect(Math.abs(a.x - b.x)).toBeGreaterThanOrEqual(STEPS.down.leaf - 1e-9);
    const root = layOut(roots, 'down').get('C19H25N2O5 1');
    expect(root?.y).toBe(0);
    expect(layOut(roots, 'down').get('C12H14NO2 1')?.y).toBe(2 * STEPS.down.layer);
  });
  it('turns to the right when many leaves would crowd one layer', () => {
    expect(directionOf(wide, 2)).toBe('right');
    expect(directionOf(branchesOf(graphOf([top, middle, low])), 2)).toBe('down');
  });
  it('moves a leaf over the free room beside a deep neighbour', () => {
    const [a, b] = [ion('C9H9', 117, ['C19H25N2O5', 361.18, 'X']), ion('C8H8', 104, ['C19H25N2O5', 361.18, 'X'])];
    const below = [0, 1, 2].map((i) => ion(`C${7 - i}H5`, 90 - i, ['C9H9', 117, 'Y']));
    const at = layOut(branchesOf(graphOf([top, a, b, ...below])), 'down');
    const [left, right] = [at.get('C9H9 1'), at.get('C8H8 1')];
    expect((right?.x ?? 0) - (left?.x ?? 0)).toBeCloseTo(STEPS.down.leaf, 9);
  });
  it('has a place for every node', () => {
    expect(layOut(wide, 'right').size).toBe(13);
  });
});

describe('zoomToShow', () => {
  it('shrinks with the number of ions and grows with the pane', () => {
    const leaves = (count: number) =>
      Array.from({ length: count }, (_, i) => ion(`C${i + 2}H5`, 30 + 12 * i, ['C19H25N2O5', 361.18, 'X']));
    const roots = (count: number) => branchesOf(graphOf([top, ...leaves(count)]));
    const pane = { width: 600, height: 300 };
    expect(zoomToShow(roots(12), pane)).toBeLessThan(zoomToShow(roots(4), pane));
    expect(zoomToShow(roots(12), { width: 1200, height: 600 })).toBeCloseTo(2 * zoomToShow(roots(12), pane), 9);
  });
});
