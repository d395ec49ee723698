import type { FrozenIon, FrozenSpectrum, RevisionContent } from './content';

/** A small tree for tests: caffeine's protonated molecule with one MS3 spectrum. Figures computed from AME2020 masses. */
export function sampleContent(): RevisionContent {
  return {
    format: 'rivenmark-tree',
    formatVersion: 1,
    tree: {
      ...{ id: '11111111-1111-4111-8111-111111111111', name: 'Unknown A', version: 7, precursorMz: 195.0877 },
      ...{ charge: 1, polarity: 'positive', adduct: '[M+H]+', formula: 'C8H10N4O2', formulaFixed: false },
      ...{ ionFormula: 'C8H11N4O2', calculatedMz: 195.087652, errorPpm: 0.246, explained: 0.914 },
      ...{ confidenceLevel: '3', notes: [] }
    },
    study: { id: '22222222-2222-4222-8222-222222222222', name: 'Shore extracts' },
    run: {
      ...{ id: '33333333-3333-4333-8333-333333333333', fileName: 'k12-f7.mzML', sha256: 'ab'.repeat(32) },
      ...{ instrument: 'Orbitrap instrument', ionSource: 'ESI', startTime: null, scans: { '1': 4, '2': 12, '3': 9 } }
    },
    settings: { elements: 'CHNOPS', adducts: [], tolerance: null, separateEnergies: false },
    spectra: [
      sampleSpectrum(0, { level: 2, path: [195.0877], parent: null }),
      sampleSpectrum(1, { level: 3, path: [195.0877, 138.0662], parent: 0, activations: ['CID'] })
    ],
    ions: [
      sampleIon(1, {
        ...{ mz: 195.0877, intensity: 250, formula: 'C8H11N4O2', calculatedMz: 195.087652, errorPpm: 0.246 },
        ...{ isPrecursor: true, loss: null, fromMz: null, fromFormula: null, link: null }
      }),
      sampleIon(2, {}),
      sampleIon(3, {
        ...{ spectrum: 1, mz: 110.0713, intensity: 500, formula: 'C5H8N3', calculatedMz: 110.071273, errorPpm: 0.25 },
        ...{ fromMz: 138.0662, fromFormula: 'C6H8N3O', loss: 'CO', state: 'proposed', decidedBy: null }
      }),
      sampleIon(4, {
        ...{ spectrum: 1, mz: 99.5, intensity: 40, formula: null, calculatedMz: null, errorPpm: null, state: 'open' },
        ...{ fromMz: null, fromFormula: null, loss: null, link: null, decidedBy: null, score: null }
      })
    ],
    candidates: [],
    remarks: []
  };
}

export const sampleSpectrum = (index: number, change: Partial<FrozenSpectrum>): FrozenSpectrum => ({
  ...{ index, level: 2, path: [195.0877], parent: null, linkedBy: 'reference', scanCount: 12 },
  ...{ isolation: { target: 195.09, lower: 0.5, upper: 0.5 }, activations: ['HCD'], energies: [30], energyUnit: '%' },
  ...{ analyser: 'orbitrap', tolerance: { ppm: 10, mda: 1 }, time: [60, 66.5] },
  ...change
});

/** m/z 138.0662, C6H8N3O+, confirmed, the base peak of the MS2 spectrum. */
export const sampleIon = (id: number, change: Partial<FrozenIon>): FrozenIon => ({
  ...{ id, spectrum: 0, mz: 138.0662, intensity: 1000, scans: 12, state: 'confirmed', formula: 'C6H8N3O', charge: 1 },
  ...{ calculatedMz: 138.066188, errorPpm: 0.087, dbe: 4.5, oddElectron: false, fromMz: 195.0877 },
  ...{ fromFormula: 'C8H11N4O2', loss: 'C2H3NO', lossRadical: false, link: 'measured', isPrecursor: false },
  ...{ flag: null, score: 9.1, rival: null, reason: null, decidedBy: 'Annotator' },
  ...change
});
