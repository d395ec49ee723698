import { describe, expect, it } from 'vitest';
import { spectrum, treeOf } from '../../../../tests/helpers/assembled-trees';
import { ionIsotopePeaks } from '../isotope';
import { add, formatFormula, ionMz, parseElementRanges, parseFormula } from '../chem';
import { CoreError } from '../errors';
import { type SuggestOptions } from '../model';
import { defaultSuggestOptions, suggest } from './index';

const mz = (formula: string, charge = 1) => ionMz(parseFormula(formula), charge);

// Cocaine [M+H]+ and its standard product ions (literature assignments).
const COCAINE = ['C17H22NO4', 'C10H16NO2', 'C9H12NO', 'C8H12N', 'C7H5O', 'C5H8N', 'C6H5'];
const cocaine = () =>
  spectrum({ path: [mz(COCAINE[0])], analyser: 'orbitrap', peaks: COCAINE.map((f, i) => [mz(f), 100 - 10 * i]) });
const options = (facts: Partial<SuggestOptions> = {}): SuggestOptions => ({ ...defaultSuggestOptions(), ...facts });
const known = options({ formula: 'C17H21NO4', adducts: ['[M+H]+'] });

describe('suggest with a known formula', () => {
  it('annotates every ion with formula, loss, link and terms that sum to the score', () => {
    const { spectra, candidates, explainedIntensity, adduct } = suggest(treeOf('positive', [cocaine()]), known);
    expect(adduct).toBe('[M+H]+');
    expect(candidates).toHaveLength(1);
    expect(explainedIntensity).toBe(1);
    expect(spectra[0].map((ion) => ion.formula)).toEqual([...COCAINE].reverse());
    const precursor = spectra[0].at(-1);
    expect(precursor).toMatchObject({ isPrecursor: true, loss: null, link: null });
    for (const ion of spectra[0]) {
      expect(Object.values(ion.terms).reduce((a, b) => a + b, 0)).toBeCloseTo(ion.score ?? NaN, 9);
      expect(ion.alternatives[0]?.formula).toBe(ion.formula);
    }
  });

  it('tells measured from inferred links', () => {
    const ms3 = spectrum({
      path: [mz('C17H22NO4'), mz('C10H16NO2')],
      analyser: 'orbitrap',
      peaks: [
        [mz('C9H12NO'), 100],
        [mz('C8H12N'), 40]
      ]
    });
    const [, ions] = suggest(treeOf('positive', [cocaine(), ms3]), known).spectra;
    const methanol = ions.find((ion) => ion.formula === 'C9H12NO');
    expect(methanol).toMatchObject({ fromFormula: 'C10H16NO2', loss: 'CH4O', link: 'measured' });
    expect(ions.find((ion) => ion.formula === 'C8H12N')).toMatchObject({
      fromFormula: 'C9H12NO',
      loss: 'CO',
      link: 'inferred'
    });
  });

  it('keeps an ion of a deeper stage within the formula of its isolated ion', () => {
    // Within the whole molecule 105.0335 is C7H5O; the isolated C8H12N has no oxygen.
    const ms3 = spectrum({ path: [mz('C17H22NO4'), mz('C8H12N')], analyser: 'orbitrap', peaks: [[mz('C7H5O'), 100]] });
    expect(suggest(treeOf('positive', [cocaine(), ms3]), known).spectra[1][0].formula).toBeNull();
  });

  it('takes confirmed and rejected formulas as hard', () => {
    const at = spectrum({
      path: [304],
      analyser: 'ion-trap',
      peaks: [
        [182.1, 100],
        [150.1, 50]
      ]
    });
    const free = suggest(treeOf('positive', [at]), known).spectra[0][1];
    const second = free.alternatives[1].formula;
    const confirmed = options({
      ...known,
      constraints: [{ spectrum: 0, mz: 182.1, kind: 'confirmed', formula: second }]
    });
    expect(suggest(treeOf('positive', [at]), confirmed).spectra[0][1].formula).toBe(second);
    const rejected = options({
      ...known,
      constraints: [{ spectrum: 0, mz: 182.1, kind: 'rejected', formula: free.formula }]
    });
    const after = suggest(treeOf('positive', [at]), rejected).spectra[0][1];
    expect(after.alternatives.map((a) => a.formula)).not.toContain(free.formula);
    const none = options({ ...known, constraints: [{ spectrum: 0, mz: 182.1, kind: 'rejected', formula: null }] });
    expect(suggest(treeOf('positive', [at]), none).spectra[0][1].formula).toBeNull();
  });

  it('marks the 13C satellite of a product ion when the window let M+1 in, and only then', () => {
    const peaks = [
      [mz('C10H16NO2'), 100],
      [mz('C10H16NO2') + 1.00335, 10]
    ] as const;
    const at = (upper: number) =>
      spectrum({
        path: [mz('C17H22NO4')],
        analyser: 'orbitrap',
        peaks,
        isolation: { target: mz('C17H22NO4'), lower: 1, upper }
      });
    expect(suggest(treeOf('positive', [at(1.5)]), known).spectra[0][1].remark).toBe('isotope');
    expect(suggest(treeOf('positive', [at(0.4)]), known).spectra[0][1].remark).toBeNull();
  });

  it('leaves ions above a singly charged precursor open, with the reason', () => {
    const above = spectrum({ path: [mz('C17H22NO4')], analyser: 'orbitrap', peaks: [[mz('C17H22NO4') + 41.3, 10]] });
    expect(suggest(treeOf('positive', [above]), known).spectra[0][0]).toMatchObject({
      formula: null,
      remark: 'above-precursor'
    });
  });

  it('finds products above a doubly charged precursor', () => {
    const path = [mz('C20H32N4O4', 2)];
    const two = spectrum({ path, analyser: 'orbitrap', peaks: [[mz('C15H23N2O3'), 100]] });
    const found = suggest(
      treeOf('positive', [two], { charge: 2 }),
      options({ formula: 'C20H30N4O4', adducts: ['[M+2H]2+'] })
    );
    expect(found.charge).toBe(2);
    expect(found.spectra[0][0]).toMatchObject({ formula: 'C15H23N2O3', charge: 1 });
  });

  it('finds water taken up in the trap', () => {
    // Sulfathiazole: C6H6N+ (m/z 92) isolated in a trap gives C6H8NO+ (m/z 110), heavier than itself.
    const stages = [
      spectrum({
        path: [256],
        analyser: 'ion-trap',
        peaks: [
          [156, 100],
          [92.1, 40]
        ]
      }),
      spectrum({
        path: [256, 92.1],
        analyser: 'ion-trap',
        peaks: [
          [110.1, 100],
          [65.2, 18]
        ]
      })
    ];
    const [, ions] = suggest(
      treeOf('positive', stages),
      options({ formula: 'C9H9N3O2S2', adducts: ['[M+H]+'] })
    ).spectra;
    expect(ions[1]).toMatchObject({ formula: 'C6H8NO', loss: null });
    expect(ions[1].terms['water adduct']).toBeLessThan(0);
  });

  it('names no loss that is not the difference of the two ions', () => {
    // C6H6NO2S+ (m/z 156) less SO2 and with water is C6H8NO+: neither SO2 nor anything else is what 156 has more.
    const stages = [
      spectrum({ path: [256], analyser: 'ion-trap', peaks: [[156, 100]] }),
      spectrum({ path: [256, 156], analyser: 'ion-trap', peaks: [[110.1, 100]] })
    ];
    const known = options({ formula: 'C9H9N3O2S2', adducts: ['[M+H]+'] });
    const [, [ion]] = suggest(treeOf('positive', stages), known).spectra;
    for (const { formula, loss } of ion.alternatives) {
      if (loss === null) continue;
      expect(formatFormula(add(parseFormula(formula), parseFormula(loss)))).toBe(ion.fromFormula);
    }
    expect(ion.alternatives.find(({ formula }) => formula === 'C6H8NO')?.loss).toBeNull();
  });
});

describe('suggest without a formula', () => {
  const ranking = options({
    adducts: ['[M+H]+'],
    elements: parseElementRanges('C0-40H0-80N0-6O0-12S0-2'),
    tolerance: { ppm: 5, mda: 0 }
  });

  it('ranks the true precursor formula first and gives the same bytes again', () => {
    const once = suggest(treeOf('positive', [cocaine()]), ranking);
    expect(once.candidates[0]).toMatchObject({ rank: 1, formula: 'C17H21NO4', ionFormula: 'C17H22NO4' });
    expect(JSON.stringify(suggest(treeOf('positive', [cocaine()]), ranking))).toBe(JSON.stringify(once));
  });

  it('uses the isotope pattern of MS1', () => {
    const ion = 'C11H13Cl2N2O5';
    const peaks = ionIsotopePeaks(parseFormula(ion), 1, 0.005);
    const ms1 = { mz: Float64Array.from(peaks, (p) => p.mz), intensity: Float64Array.from(peaks, (p) => p.relative) };
    const at = spectrum({ path: [mz(ion)], analyser: 'orbitrap', peaks: [[mz('C9H11N2O4'), 1]] });
    const wide = options({ ...ranking, elements: parseElementRanges('C0-40H0-80N0-6O0-12S0-2Cl0-4') });
    const best = suggest(treeOf('positive', [at], { ms1 }), wide).candidates[0];
    expect(best.formula).toContain('Cl2');
    expect(best.terms['isotope pattern']).toBeGreaterThan(-1);
  });

  it('says why unit-resolution spectra stay open', () => {
    const trap = spectrum({ path: [304], analyser: 'ion-trap', peaks: [[182.1, 100]] });
    const { candidates, spectra, notes } = suggest(treeOf('positive', [trap]), options());
    expect(candidates).toEqual([]);
    expect(spectra[0][0].formula).toBeNull();
    expect(notes.join(' ')).toContain('unit resolution');
  });

  it('stops when cancelled and reports progress before', () => {
    const seen: string[] = [];
    let cancelled = false;
    const act = () =>
      suggest(treeOf('positive', [cocaine()]), ranking, {
        onProgress: (_done, _total, what) => {
          seen.push(what);
          cancelled = true;
        },
        isCancelled: () => cancelled
      });
    expect(act).toThrow(CoreError);
    expect(seen.length).toBeGreaterThan(0);
  });

  it('refuses an ion type of the other polarity', () => {
    expect(() => suggest(treeOf('positive', [cocaine()]), options({ adducts: ['[M-H]-'] }))).toThrow(/positive/);
  });
});

describe('noise', () => {
  // Invented: 200 peaks at places of no meaning, each 0.02 percent of the base peak.
  const noise = Array.from({ length: 200 }, (_, i) => [52.013 + i * 1.2 + ((i * 37) % 11) * 0.021, 0.02] as const);
  const noisy = spectrum({
    ...{ path: [mz(COCAINE[0])], analyser: 'orbitrap' },
    peaks: [...COCAINE.map((f, i) => [mz(f), 100 - 10 * i] as const), ...noise]
  });

  it('is left open, with what could be proposed, and the ions of the molecule are not', () => {
    const [ions] = suggest(treeOf('positive', [noisy]), known).spectra;
    const weak = ions.filter((ion) => ion.intensity < 1);
    const left = weak.filter((ion) => ion.remark === 'noise');
    for (const ion of left) expect(ion).toMatchObject({ formula: null, score: null });
    expect(left.filter((ion) => ion.alternatives.length > 0).length).toBeGreaterThan(5);
    expect(ions.filter((ion) => ion.intensity > 1).map((ion) => ion.formula)).toEqual([...COCAINE].reverse());
  });

  it('is not suspected where everything else is explained', () => {
    const [all] = suggest(treeOf('positive', [noisy]), known).spectra;
    const doubtful = all.find((ion) => ion.remark === 'noise' && ion.alternatives.length > 0)!;
    const clean = spectrum({
      ...{ path: [mz(COCAINE[0])], analyser: 'orbitrap' },
      peaks: [...COCAINE.map((f, i) => [mz(f), 100 - 10 * i] as const), [doubtful.mz, 0.02]]
    });
    const [ions] = suggest(treeOf('positive', [clean]), known).spectra;
    expect(ions.find((ion) => ion.mz === doubtful.mz)?.formula).toBe(doubtful.alternatives[0].formula);
  });
});

describe('ion types', () => {
  it('that give the same ion are told apart by how usual they are', () => {
    const { candidates } = suggest(treeOf('positive', [cocaine()]), options());
    expect(candidates[0]).toMatchObject({ formula: 'C17H21NO4', adduct: '[M+H]+' });
    const same = candidates.filter((c) => c.ionFormula === 'C17H22NO4');
    expect(same.length).toBeGreaterThan(1);
    for (const other of same.slice(1)) expect(other.score).toBeLessThan(candidates[0].score);
  });

  it('are not weighed when one was named', () => {
    const { candidates } = suggest(treeOf('positive', [cocaine()]), options({ adducts: ['[M+NH4]+'] }));
    expect(candidates.every((c) => !('ion type' in c.terms))).toBe(true);
  });
});
