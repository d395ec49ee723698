import { describe, expect, it } from 'vitest';
import { placeLabels } from './labels';

const box = { width: 50, height: 12, gap: 8, left: 0, right: 1000, most: 20 };
const stick = (x: number, height: number, favoured = false) => ({ x, top: 100 - height, intensity: height, favoured });
const labelled = (sticks: ReturnType<typeof stick>[], over = {}) =>
  placeLabels(sticks, { ...box, ...over })
    .map((label) => label.stick.x)
    .sort((a, b) => a - b);

describe('placeLabels', () => {
  it('labels everything that is far apart', () => {
    expect(labelled([stick(100, 10), stick(300, 80), stick(500, 40)])).toEqual([100, 300, 500]);
  });
  it('prefers the stronger of two neighbours', () => {
    expect(labelled([stick(300, 40), stick(320, 42)])).toEqual([320]);
  });
  it('puts no label across a taller stick', () => {
    expect(labelled([stick(300, 10), stick(310, 90)])).toEqual([310]);
  });
  it('labels a favoured stick before all others', () => {
    expect(labelled([stick(300, 40, true), stick(320, 42)])).toEqual([300]);
  });
  it('keeps labels inside and counts them', () => {
    const [first] = placeLabels([stick(2, 50)], box);
    expect(first.x).toBe(25);
    expect(labelled([stick(100, 10), stick(300, 80), stick(500, 40)], { most: 2 })).toEqual([300, 500]);
  });
});
