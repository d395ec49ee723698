import { expect, it } from 'vitest';
import type { PrecursorRow } from '$lib/schema/run';
import { checksOf, type CheckInput } from './checks';

const precursor = (half: number | null): PrecursorRow => ({
  id: 'p',
  mz: 300,
  charge: 1,
  isolation: { target: 300, lower: half, upper: half },
  levels: { 2: 1 },
  intensity: 1,
  trees: []
});
const input = (over: Partial<CheckInput> = {}): CheckInput => ({
  info: {
    polarity: 'positive',
    ionSource: 'ESI',
    analysers: ['orbitrap'],
    instrument: null,
    startTime: null,
    scans: { 1: 2, 2: 8 },
    checksum: 'ok'
  },
  warnings: [],
  precursors: [precursor(0.5)],
  bytes: 2_000_000,
  massError: null,
  ...over
});
const of = (name: string, over?: Partial<CheckInput>) => checksOf(input(over)).find((check) => check.name === name);

it('says that the checksum fits', () => expect(of('Checksum')).toMatchObject({ good: true }));
it('counts the scans that were profile data', () =>
  expect(of('Peaks', { warnings: [{ code: 'centroided', message: '', scans: [], count: 3 }] })?.words).toMatch(
    /^3 of 10/
  ));
it('warns of wide isolation windows', () => {
  expect(of('Isolation')).toMatchObject({ good: null, words: 'windows 1.00 m/z wide' });
  expect(of('Isolation', { precursors: [precursor(0.5), precursor(2)] })).toMatchObject({ good: false });
  expect(of('Isolation', { precursors: [precursor(null)] })?.words).toMatch(/no widths/);
});
it('tells the mass accuracy only from confirmed ions', () => {
  expect(of('Mass accuracy')?.words).toMatch(/cannot be told/);
  expect(of('Mass accuracy', { massError: { median: -1.24, ions: 7 } })?.words).toBe(
    'median −1.2 ppm over 7 confirmed ions'
  );
});
