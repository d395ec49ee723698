import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { compareTrees, cosine, entropySimilarity, matchPeaks, spectralEntropy } from './index';

const list = (...peaks: [number, number][]) => ({
  mz: Float64Array.from(peaks, ([mz]) => mz),
  intensity: Float64Array.from(peaks, ([, intensity]) => intensity)
});
const within = () => 0.01;

// Two spectra and their values worked out by an independent implementation of the published formulas
// (cosine: J. Am. Soc. Mass Spectrom. 5, 859 (1994); entropy: Nat. Methods 18, 1524 (2021)), tolerance 0.01.
const A = list([69.0447, 8], [110.0713, 20], [138.0662, 100], [195.0877, 30]);
const B = list([69.0447, 4], [83.0604, 10], [110.0713, 60], [138.0662, 100]);

describe('cosine', () => {
  it.each([
    [0, 1, 0.899659],
    [0, 0.5, 0.846151],
    [1, 0.5, 0.781805],
    [3, 0.6, 0.587717]
  ])('with powers %d and %d of m/z and intensity', (mzPower, intensityPower, expected) => {
    expect(cosine(A, B, { tolerance: within, mzPower, intensityPower })).toBeCloseTo(expected, 6);
  });

  it('is 1 for the same spectrum and 0 for disjoint or empty ones', () => {
    expect(cosine(A, A, { tolerance: within })).toBeCloseTo(1, 12);
    expect(cosine(A, list([105.0335, 100]), { tolerance: within })).toBe(0);
    expect(cosine(A, list(), { tolerance: within })).toBe(0);
  });

  it('finds a modified analogue when the precursor shift is allowed', () => {
    const shifted = list(...[...A.mz].map((mz, i): [number, number] => [mz + 14.01565, A.intensity[i]]));
    expect(cosine(shifted, A, { tolerance: within })).toBe(0);
    expect(cosine(shifted, A, { tolerance: within, shift: 14.01565 })).toBeCloseTo(1, 12);
  });
});

describe('spectral entropy', () => {
  it('of the check spectra', () => {
    expect(spectralEntropy(A.intensity)).toBeCloseTo(1.017639, 6);
    expect(spectralEntropy(B.intensity)).toBeCloseTo(0.936362, 6);
    expect(spectralEntropy([50, 50])).toBeCloseTo(Math.log(2), 12);
  });

  it('similarity, plain and weighted', () => {
    expect(entropySimilarity(A, B, within, false)).toBeCloseTo(0.833608, 6);
    expect(entropySimilarity(A, B, within)).toBeCloseTo(0.79376, 5);
    expect(entropySimilarity(A, A, within)).toBeCloseTo(1, 12);
    expect(entropySimilarity(A, list([105.0335, 1]), within)).toBe(0);
  });
});

describe('matches', () => {
  it('never use a peak twice', () => {
    const spectrum = fc
      .array(fc.tuple(fc.double({ min: 50, max: 60, noNaN: true }), fc.double({ min: 0.1, max: 100, noNaN: true })), {
        maxLength: 30
      })
      .map((peaks) => list(...peaks.sort(([x], [y]) => x - y)));
    fc.assert(
      fc.property(spectrum, spectrum, (a, b) => {
        const pairs = matchPeaks(a, b, () => 0.5);
        expect(new Set(pairs.map((pair) => pair.a)).size).toBe(pairs.length);
        expect(new Set(pairs.map((pair) => pair.b)).size).toBe(pairs.length);
        for (const pair of pairs) expect(Math.abs(a.mz[pair.a] - b.mz[pair.b])).toBeLessThanOrEqual(0.5);
      })
    );
  });
});

describe('two trees', () => {
  const one = { ions: new Map([[2, ['C10H16NO2', 'C7H5O']]]), losses: new Map([[2, ['C7H6O2', 'CH4O']]]) };
  const other = {
    ions: new Map([
      [2, ['C10H16NO2']],
      [3, ['C7H5O']]
    ]),
    losses: new Map([[2, ['CH4O', 'C7H6O2']]])
  };

  it('share ions and losses by stage', () => {
    const compared = compareTrees(one, other);
    expect(compared.sharedIons).toEqual(new Map([[2, ['C10H16NO2']]]));
    expect(compared.ionSimilarity).toBeCloseTo(1 / 3);
    expect(compared.lossSimilarity).toBe(1);
  });

  it('are compared the same way round', () => {
    expect(compareTrees(one, other).ionSimilarity).toBe(compareTrees(other, one).ionSimilarity);
  });
});
