import { describe, expect, it } from 'vitest';
import type { SpectrumView } from '$lib/schema/workbench';
import { connectorsOf, laneOrder, lanesHeight, layLanes } from './lanes';

const spectrum = (index: number, path: number[], parent: number | null): SpectrumView => ({
  index,
  level: path.length + 1,
  path,
  parent,
  linkedBy: parent === null ? 'none' : 'reference',
  isolation: null,
  activations: ['CID'],
  energies: [35],
  energyUnit: '%',
  time: null,
  analyser: 'orbitrap',
  scanCount: 1
});
const spectra = [
  spectrum(0, [361.1758], null),
  spectrum(1, [361.1758, 204.1019], 0),
  spectrum(2, [361.1758, 301.1547], 0),
  spectrum(3, [361.1758, 204.1019, 174.0913], 1)
];
const sizes = { available: 400, headroom: 22 };

describe('laneOrder', () => {
  it('puts stage below stage, the heavier isolated ion first', () => {
    expect(laneOrder(spectra).map((s) => s.index)).toEqual([0, 2, 1, 3]);
  });
});

describe('layLanes', () => {
  it('stacks lanes without gap or overlap', () => {
    const lanes = layLanes(laneOrder(spectra), new Set(), sizes);
    lanes.slice(1).forEach((lane, i) => expect(lane.top).toBe(lanes[i].top + lanes[i].height));
    expect(lanes.every((lane) => lane.base > lane.top && lane.reach > 30)).toBe(true);
  });
  it('gives the room of folded lanes to the others', () => {
    const open = layLanes(spectra, new Set(), sizes);
    const folded = layLanes(spectra, new Set([1, 2]), sizes);
    expect(folded[1].height).toBeLessThan(30);
    expect(folded[0].height).toBeGreaterThan(open[0].height);
  });
  it('lets forty lanes grow beyond the height instead of crushing them', () => {
    const many = Array.from({ length: 40 }, (_, i) => spectrum(i, [300, 200 + i], 0));
    expect(lanesHeight(layLanes(many, new Set(), sizes))).toBeGreaterThan(40 * 70);
  });
  it('has no height without lanes', () => {
    expect(lanesHeight(layLanes([], new Set(), sizes))).toBe(0);
  });
});

describe('connectorsOf', () => {
  it('joins each lane to the lane its ion was isolated from, at the isolated m/z', () => {
    const lanes = layLanes(laneOrder(spectra), new Set(), sizes);
    expect(connectorsOf(lanes).map((c) => [c.from, c.to, c.mz])).toEqual([
      [0, 2, 301.1547],
      [0, 1, 204.1019],
      [1, 3, 174.0913]
    ]);
    expect(connectorsOf(lanes).every((c) => c.y2 > c.y1)).toBe(true);
  });
  it('draws none for a lane that could not be joined', () => {
    const lost = { ...spectra[1], linkedBy: 'none' as const };
    expect(connectorsOf(layLanes([spectra[0], lost], new Set(), sizes))).toEqual([]);
  });
});
