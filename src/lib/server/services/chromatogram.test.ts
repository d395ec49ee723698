import { expect, it } from 'vitest';
import { currentTraces } from './chromatogram';

const point = (index: number, level: number, time: number | null, current: number) => ({ index, level, time, current });

it('gives one trace for each stage, in the order of time', () => {
  const { byTime, traces } = currentTraces([point(0, 2, 5, 1), point(1, 1, 2, 9), point(2, 2, 3, 4)]);
  expect(byTime).toBe(true);
  expect(traces).toEqual([
    { level: 1, x: [2], y: [9] },
    { level: 2, x: [3, 5], y: [4, 1] }
  ]);
});

it('counts scans where one states no time', () => {
  expect(currentTraces([point(0, 1, 1, 1), point(1, 1, null, 2)])).toMatchObject({
    byTime: false,
    traces: [{ x: [0, 1] }]
  });
});

it('thins a long trace without losing its highest point', () => {
  const points = Array.from({ length: 50_000 }, (_, i) => point(i, 1, i, i === 31_337 ? 1e9 : i % 7));
  const [{ x, y }] = currentTraces(points).traces;
  expect(x.length).toBeLessThanOrEqual(600);
  expect(x[y.indexOf(1e9)]).toBe(31_337);
});
