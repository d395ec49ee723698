import { describe, expect, it } from 'vitest';
import type { PrecursorRecord, RunInfo, Scan } from '../model';
import { assemble, surveyPrecursors } from '.';

const RUN: RunInfo = {
  polarity: 'positive',
  ionSource: 'ESI',
  analysers: [],
  instrument: null,
  startTime: null,
  scans: {}
};

function precursor(target: number, more: Partial<PrecursorRecord> = {}): PrecursorRecord {
  return {
    spectrumRef: null,
    level: null,
    isolation: { target, lower: 0.5, upper: 0.5 },
    selectedMz: target,
    charge: null,
    intensity: null,
    activations: ['CID'],
    energy: null,
    energyUnit: null,
    ...more
  };
}

type Draft = Partial<Scan> & { level: number; ions?: [number, number][] };

/** Scans in order with ids "1", "2", …; an orbitrap unless said otherwise. */
function scans(...drafts: Draft[]): Scan[] {
  return drafts.map(({ ions = [], ...draft }, index) => ({
    index,
    id: String(index + 1),
    polarity: 'positive',
    time: index * 0.5,
    centroided: true,
    centroidedHere: false,
    totalIonCurrent: 0,
    basePeakMz: null,
    basePeakIntensity: null,
    precursors: [],
    filterString: null,
    analyser: 'orbitrap',
    peakCount: ions.length,
    peaks: { mz: Float64Array.from(ions, (ion) => ion[0]), intensity: Float64Array.from(ions, (ion) => ion[1]) },
    ...draft
  }));
}

const paths = (list: Scan[], options = {}) =>
  assemble(list, RUN, options).trees.map((tree) =>
    tree.spectra.map((s) => `${s.path.join('>')} ${s.linkedBy} ${s.parent}`)
  );

describe('joining', () => {
  const ms1: Draft = { level: 1, ions: [[300.1, 100]] };
  const ms2: Draft = {
    level: 2,
    precursors: [precursor(300.1)],
    ions: [
      [180.05, 5],
      [250.1, 9]
    ]
  };

  it('follows scan references even where scans are interleaved', () => {
    const other: Draft = { level: 2, precursors: [precursor(400.2)], ions: [[250.1, 9]] };
    const list = scans(ms1, ms2, other, { level: 3, precursors: [precursor(250.1, { spectrumRef: '2' })] });
    expect(paths(list)).toEqual([['300.1 none null', '300.1>250.1 reference 0'], ['400.2 none null']]);
  });

  it('takes the whole path from a list of precursors, in either order', () => {
    const chain = [precursor(120.1, { level: 3 }), precursor(250.1, { level: 2 }), precursor(300.1, { level: 1 })];
    const ms3: Draft = { level: 3, precursors: [precursor(250.1, { level: 2 }), precursor(300.1, { level: 1 })] };
    for (const order of [chain, [...chain].reverse()]) {
      expect(paths(scans(ms1, ms2, ms3, { level: 4, precursors: order }))).toEqual([
        ['300.1 none null', '300.1>250.1 precursor-list 0', '300.1>250.1>120.1 precursor-list 1']
      ]);
    }
  });

  it('takes the path from the filter string, whatever was measured in between', () => {
    const other: Draft = { level: 2, precursors: [precursor(400.2)], ions: [[250.1, 9]] };
    const filterString = 'FTMS + c ESI d Full ms3 300.1000@cid35.00 250.1000@cid35.00 [60-260]';
    const list = scans(ms1, ms2, other, { level: 3, filterString, precursors: [precursor(250.1)] });
    expect(paths(list)[0]).toEqual(['300.1 none null', '300.1>250.1 filter-string 0']);
  });

  it('falls back to the last spectrum above that holds the ion, and says so', () => {
    const other: Draft = { level: 2, precursors: [precursor(400.2)], ions: [[90, 9]] };
    const list = scans(ms1, ms2, other, { level: 3, precursors: [precursor(250.1)] });
    expect(paths(list)[0]).toEqual(['300.1 none null', '300.1>250.1 isolated-mz 0']);
    expect(assemble(list, RUN).warnings).toMatchObject([{ code: 'joined-by-mz', scans: ['4'] }]);
  });

  it('trusts the reference more than the filter string', () => {
    const other: Draft = { level: 2, precursors: [precursor(400.2)], ions: [[250.1, 9]] };
    const filterString = 'FTMS + c ESI d Full ms3 400.2000@cid35.00 250.1000@cid35.00 [60-260]';
    const list = scans(ms1, ms2, other, {
      level: 3,
      filterString,
      precursors: [precursor(250.1, { spectrumRef: '2' })]
    });
    expect(paths(list)[0]).toEqual(['300.1 none null', '300.1>250.1 reference 0']);
  });

  it('tolerates references to nothing or to the wrong stage, with a warning', () => {
    const list = scans(
      ms1,
      ms2,
      { level: 3, precursors: [precursor(250.1, { spectrumRef: '99' })] },
      { level: 3, precursors: [precursor(180.05, { spectrumRef: '1' })] }
    );
    expect(paths(list)).toEqual([['300.1 none null', '300.1>180.05 isolated-mz 0', '300.1>250.1 isolated-mz 0']]);
    expect(assemble(list, RUN).warnings).toContainEqual(expect.objectContaining({ code: 'bad-reference', count: 2 }));
  });

  it('keeps and names orphans', () => {
    const list = scans(ms1, ms2, { level: 4, precursors: [precursor(99.9)] }, { level: 2 });
    expect(assemble(list, RUN).orphans).toEqual([
      { scanId: '4', level: 2, reason: 'The scan names no isolated m/z' },
      { scanId: '3', level: 4, reason: expect.stringContaining('MS3') as string }
    ]);
  });

  it('places a spectrum whose upper stage was not measured when it states its path', () => {
    const filterString = 'ITMS + p NSI t Full ms3 599.77@hcd27.00 677.31@cid33.00 [107.00-605.00]';
    const notches = [996.46, 677.31, 733.4].map((mz) => precursor(mz, { level: 2 }));
    const list = scans({ level: 3, filterString, precursors: [...notches, precursor(599.765, { level: 1 })] });
    const [tree] = assemble(list, RUN).trees;
    expect(tree.spectra.map((s) => [s.path, s.parent])).toEqual([[[599.765, 677.31], null]]);
    expect(tree.notes.join(' ')).toMatch(/3 ions were isolated together/);
    expect(tree.notes.join(' ')).toMatch(/MS2 spectrum of this precursor ion was not measured/);
  });

  it('never joins across polarities', () => {
    const negative: Draft = { level: 2, polarity: 'negative', precursors: [precursor(300.1)], ions: [[250.1, 1]] };
    const list = scans(ms2, negative, { level: 3, precursors: [precursor(250.1)] });
    const { trees } = assemble(list, { ...RUN, polarity: 'mixed' });
    expect(trees.map((tree) => [tree.polarity, tree.spectra.length])).toEqual([
      ['negative', 1],
      ['positive', 2]
    ]);
  });
});

describe('precursor ions', () => {
  it('puts repeated scans of one ion into one tree, within the tolerance of the analyser above', () => {
    const repeat = (mz: number): Draft => ({ level: 2, precursors: [precursor(mz)] });
    expect(assemble(scans({ level: 1 }, repeat(300.1), repeat(300.104), repeat(300.2)), RUN).trees).toHaveLength(2);
    const trap = scans({ level: 1 }, repeat(291), repeat(291.2), repeat(292)).map((scan) => ({
      ...scan,
      analyser: 'ion-trap' as const
    }));
    expect(assemble(trap, RUN).trees.map((tree) => tree.spectra[0].scanIds)).toEqual([['2', '3'], ['4']]);
  });

  it('keeps neighbouring unit-resolution paths apart', () => {
    const list = scans(
      {
        level: 2,
        precursors: [precursor(291)],
        ions: [
          [115, 1],
          [116, 1]
        ]
      },
      { level: 3, precursors: [precursor(115, { spectrumRef: '1' })] },
      { level: 3, precursors: [precursor(116, { spectrumRef: '1' })] }
    ).map((scan) => ({ ...scan, analyser: 'ion-trap' as const }));
    expect(paths(list)).toEqual([['291 none null', '291>115 reference 0', '291>116 reference 0']]);
  });

  it('uses the selected ion for the mass and the isolation target for the path', () => {
    const [tree] = assemble(
      scans({ level: 2, precursors: [precursor(627.98, { selectedMz: 627.646, charge: 3 })] }),
      RUN
    ).trees;
    expect(tree).toMatchObject({ precursorMz: 627.646, charge: 3 });
    expect(tree.spectra[0].path).toEqual([627.98]);
  });

  it('picks the tree nearest to a wanted m/z inside its window', () => {
    const list = scans({ level: 2, precursors: [precursor(300.1)] }, { level: 2, precursors: [precursor(300.4)] });
    const wanted = (precursorMz: number) => assemble(list, RUN, { precursorMz }).trees.map((tree) => tree.precursorMz);
    expect(wanted(300.35)).toEqual([300.4]);
    expect(wanted(300.1)).toEqual([300.1]);
    expect(wanted(301.5)).toEqual([]);
  });

  it('gives the isotope pattern from the MS1 scans around', () => {
    const list = scans(
      {
        level: 1,
        ions: [
          [298, 9],
          [300.1, 100],
          [301.1034, 16],
          [307, 9]
        ]
      },
      { level: 2, precursors: [precursor(300.1, { spectrumRef: '1' })] }
    );
    expect([...(assemble(list, RUN).trees[0].ms1?.mz ?? [])]).toEqual([300.1, 301.1034]);
  });
});

describe('merging', () => {
  const at = (energy: number, ions: [number, number][]): Draft => ({
    level: 2,
    precursors: [precursor(300.1, { energy, energyUnit: 'eV' })],
    ions
  });

  it('averages intensities, counts scans and keeps all energies', () => {
    const list = scans(
      at(10, [
        [100, 10],
        [200, 4]
      ]),
      at(30, [
        [100.0004, 30],
        [250, 0]
      ])
    );
    const [spectrum] = assemble(list, RUN).trees[0].spectra;
    expect(spectrum).toMatchObject({ energies: [10, 30], energyUnit: 'eV', scanIds: ['1', '2'], time: [0, 0.5] });
    expect([...spectrum.peaks.mz].map((mz) => mz.toFixed(4))).toEqual(['100.0003', '200.0000']);
    expect([...spectrum.peaks.intensity]).toEqual([20, 2]);
    expect([...spectrum.scanCounts]).toEqual([2, 1]);
  });

  it('keeps energies apart where asked', () => {
    const list = scans(at(10, []), at(30, []), at(10, []));
    const [tree] = assemble(list, RUN, { separateEnergies: true }).trees;
    expect(tree.spectra.map((spectrum) => spectrum.scanIds)).toEqual([['1', '3'], ['2']]);
  });

  it('never merges unit resolution with accurate mass', () => {
    const list = scans(at(10, []), { ...at(10, []), analyser: 'ion-trap' });
    expect(assemble(list, RUN).trees[0].spectra).toHaveLength(2);
  });
});

describe('survey', () => {
  /** Many precursor ions with repeated MS2 and MS3, joined by reference, path or ion in turn. */
  function largeRun(count: number): Scan[] {
    const drafts: Draft[] = [];
    for (let i = 0; drafts.length < count; i++) {
      const mz = 200 + ((i * 7919) % 500) + 0.1;
      if (i % 10 === 0) drafts.push({ level: 1, ions: [[mz, 1]] });
      drafts.push({
        level: 2,
        precursors: [precursor(mz)],
        ions: [
          [mz - 44, 2],
          [mz - 18.01, 5]
        ]
      });
      const spectrumRef = i % 3 === 0 ? String(drafts.length) : null;
      const filterString =
        i % 3 === 1
          ? `FTMS + c ESI Full ms3 ${mz.toFixed(4)}@cid35.00 ${(mz - 18.01).toFixed(4)}@cid35.00 [50-900]`
          : null;
      drafts.push({ level: 3, filterString, precursors: [precursor(mz - 18.01, { spectrumRef })] });
    }
    return scans(...drafts);
  }

  it('agrees with the assembly on a run of 20,000 scans', () => {
    const list = largeRun(20_000);
    const { trees, orphans } = assemble(list, RUN);
    const survey = surveyPrecursors(list, (position) => list[position].peaks);
    expect(orphans).toEqual([]);
    expect(survey).toHaveLength(500);
    expect(survey.map((ion) => ion.mz)).toEqual(trees.map((tree) => tree.precursorMz));
    expect(survey.map((ion) => ion.spectra)).toEqual(trees.map((tree) => tree.spectra.length));
    expect(new Set(survey.map((ion) => ion.spectra))).toEqual(new Set([2]));
    expect(survey.map((ion) => ion.scanIds.length)).toEqual(
      trees.map((tree) => tree.spectra.reduce((sum, spectrum) => sum + spectrum.scanIds.length, 0))
    );
  });
});
