import { describe, expect, it } from 'vitest';
import { nearestIndex, shortIntensity, ticks } from './axis';

describe('ticks', () => {
  it('are round and lie within the range', () => {
    expect(ticks(0, 10, 5)).toEqual([0, 2, 4, 6, 8, 10]);
    expect(ticks(1741, 1780, 7)).toEqual([1750, 1760, 1770, 1780]);
  });
  it('of a range without width are its one value', () => expect(ticks(5, 5, 4)).toEqual([5]));
});

describe('nearestIndex', () => {
  it.each([
    [-5, 0],
    [2.4, 1],
    [2.6, 2],
    [99, 2]
  ])('of %d among 1, 2, 3', (x, index) => expect(nearestIndex([1, 2, 3], x)).toBe(index));
  it('of an empty list is -1', () => expect(nearestIndex([], 1)).toBe(-1));
});

it.each([
  [0, '0'],
  [1440, '1440'],
  [0.25, '0.25'],
  [3.16e6, '3.2e6'],
  [3e7, '3e7']
])('writes the intensity %d as %s', (value, text) => expect(shortIntensity(value)).toBe(text));
