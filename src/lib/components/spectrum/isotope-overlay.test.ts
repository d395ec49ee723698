import { describe, expect, it } from 'vitest';
import { ionMz, parseFormula } from '$lib/core/chem';
import { compareIsotopes } from './isotope-overlay';

const at = ionMz(parseFormula('C8H11N4O2'), 1);

describe('compareIsotopes', () => {
  it('sets what is expected beside what is found, relative to the monoisotopic peak', () => {
    const ms1 = { mz: [at, at + 1.0034, at + 1.3], intensity: [2000, 180, 900] };
    const [first, second] = compareIsotopes(ms1, 'C8H11N4O2', 1);
    expect(first).toMatchObject({ offset: 0, expected: 1, found: 1 });
    // 8 carbons at 1.08 %, 4 nitrogens at 0.37 %, some H and O: about a tenth (IUPAC abundances, rounded).
    expect(second.expected).toBeCloseTo(0.103, 2);
    expect(second.found).toBeCloseTo(0.09, 9);
  });

  it('finds nothing where a peak is missing, and says nothing without the monoisotopic peak', () => {
    const [, second] = compareIsotopes({ mz: [at], intensity: [1] }, 'C8H11N4O2', 1);
    expect(second.found).toBe(0);
    expect(compareIsotopes({ mz: [at + 1.0034], intensity: [1] }, 'C8H11N4O2', 1)).toEqual([]);
  });

  it('sees the two isotopes of chlorine', () => {
    const ion = ionMz(parseFormula('C6H5ClN'), 1);
    const peaks = compareIsotopes({ mz: [ion], intensity: [1] }, 'C6H5ClN', 1);
    expect(peaks.find(({ offset }) => offset === 2)?.expected).toBeCloseTo(0.32, 1);
  });
});
