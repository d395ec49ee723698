import { describe, expect, it } from 'vitest';
import type { IonItem } from '$lib/state/ion-rows';
import { scaleOf } from './axis';
import type { Lane } from './lanes';
import { drawSticks, ionsWithin, pathsOf, raiseOf, stickNear } from './sticks';

const ion = (id: number, mz: number, relative: number, mark: IonItem['mark'] = 'proposed') =>
  ({ id, mz, relative, mark }) as IonItem;
const lane = { base: 100, reach: 80, folded: false } as Lane;
const scale = scaleOf({ from: 0, to: 100 }, 0, 1000);
const draw = (ions: IonItem[], raise = 1) => drawSticks(ions, lane, scale, raise, null);

describe('sticks', () => {
  it('stand on the base and reach by their share', () => {
    const [base, half] = draw([ion(1, 10, 100), ion(2, 20, 50)]);
    expect([base.x, base.top]).toEqual([100, 20]);
    expect(half.top).toBe(60);
  });
  it('are raised when the base peak is out of view', () => {
    const shown = ionsWithin([ion(1, 10, 100), ion(2, 20, 25)], { from: 15, to: 30 });
    expect(raiseOf(shown)).toBe(4);
    expect(draw(shown, raiseOf(shown))[0].top).toBe(20);
    expect(raiseOf([])).toBe(1);
  });
  it('are drawn as one path a state, open ones without a head', () => {
    const paths = pathsOf(draw([ion(1, 10, 9, 'open'), ion(2, 20, 9, 'confirmed'), ion(3, 30, 9, 'confirmed')]), lane);
    expect(paths.map((p) => p.state)).toEqual(['open', 'confirmed']);
    expect(paths[0].heads).toBe('');
    expect(paths[1].sticks.match(/M/g)).toHaveLength(2);
    expect(pathsOf(draw([ion(1, 10, 9)]), { ...lane, folded: true })[0].heads).toBe('');
  });
  it('are found by the pointer, the stronger of two close ones first', () => {
    const sticks = draw([ion(1, 10, 2), ion(2, 10.2, 90), ion(3, 50, 90)]);
    expect(stickNear(sticks, 100.5)?.ion.id).toBe(2);
    expect(stickNear(sticks, 300)).toBeNull();
  });
});
