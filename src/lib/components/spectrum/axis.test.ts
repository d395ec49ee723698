import { describe, expect, it } from 'vitest';
import { clampDomain, fullDomain, panDomain, scaleOf, tickDecimals, ticksOf, zoomDomain } from './axis';

const whole = { from: 50, to: 450 };

describe('scaleOf', () => {
  it('maps both ways', () => {
    const scale = scaleOf({ from: 100, to: 200 }, 20, 1020);
    expect(scale.x(150)).toBe(520);
    expect(scale.mz(scale.x(123.456))).toBeCloseTo(123.456, 10);
  });
});

describe('fullDomain', () => {
  it('holds everything with a margin', () => {
    const { from, to } = fullDomain([361.2, 82.1]);
    expect(from).toBeLessThan(82.1);
    expect(to).toBeGreaterThan(361.2);
  });
  it('has a width without ions and with one', () => {
    expect(fullDomain([])).toEqual({ from: 0, to: 100 });
    const one = fullDomain([200]);
    expect(one.to - one.from).toBeGreaterThan(0);
  });
});

describe('zoom and pan', () => {
  it('keeps the m/z under the pointer in place', () => {
    const zoomed = zoomDomain(whole, whole, 0.5, 150);
    expect(zoomed).toEqual({ from: 100, to: 300 });
  });
  it('never leaves the whole range', () => {
    expect(zoomDomain(whole, whole, 3, 100)).toEqual(whole);
    expect(panDomain({ from: 400, to: 440 }, whole, 1)).toEqual({ from: 410, to: 450 });
    expect(panDomain({ from: 60, to: 100 }, whole, -1)).toEqual({ from: 50, to: 90 });
  });
  it('stops at a narrowest range', () => {
    const { from, to } = clampDomain({ from: 100, to: 100 }, whole);
    expect(to - from).toBeCloseTo(0.05, 9);
  });
});

describe('ticksOf', () => {
  it('gives round numbers within the range, not more than asked', () => {
    expect(ticksOf({ from: 60, to: 372 }, 8)).toEqual([80, 120, 160, 200, 240, 280, 320, 360]);
    expect(ticksOf({ from: 204.05, to: 204.15 }, 5).length).toBeLessThanOrEqual(6);
  });
  it('knows its decimals', () => {
    expect(tickDecimals([80, 120])).toBe(0);
    expect(tickDecimals([204.05, 204.1])).toBe(2);
  });
});
