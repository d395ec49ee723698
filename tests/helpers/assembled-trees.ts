import {
  type AnalyserKind,
  type AssembledTree,
  type IsolationWindow,
  type PeakList,
  type Polarity,
  type TreeSpectrum
} from '../../src/lib/core/model';

/** m/z and intensity of each peak, in any order. */
export type PeakRows = readonly (readonly [mz: number, intensity: number])[];

/** Peaks as the core holds them, ascending m/z. */
export function peakList(rows: PeakRows): PeakList {
  const sorted = [...rows].sort((a, b) => a[0] - b[0]);
  return { mz: Float64Array.from(sorted, (r) => r[0]), intensity: Float64Array.from(sorted, (r) => r[1]) };
}

export interface SpectrumFacts {
  /** isolated m/z from MS2 on. */
  path: number[];
  peaks: PeakRows;
  analyser: AnalyserKind;
  isolation?: IsolationWindow | null;
}

/** A merged spectrum with the given facts; position and parent are set by `treeOf`. */
export function spectrum({ path, peaks, analyser, isolation = null }: SpectrumFacts): TreeSpectrum {
  const list = peakList(peaks);
  return {
    index: 0,
    level: path.length + 1,
    path,
    parent: null,
    linkedBy: 'isolated-mz',
    isolation,
    scanIds: [],
    activations: ['CID'],
    energies: [],
    energyUnit: null,
    analyser,
    time: null,
    peaks: list,
    scanCounts: new Uint16Array(list.mz.length).fill(1)
  };
}

/** A tree of these spectra, given stage by stage. */
export function treeOf(polarity: Polarity, spectra: TreeSpectrum[], facts: Partial<AssembledTree> = {}): AssembledTree {
  const indexed = spectra.map((s, index) => {
    const above = spectra.findIndex((o) => o.level === s.level - 1 && o.path.every((mz, i) => mz === s.path[i]));
    return { ...s, index, parent: above < 0 ? null : above };
  });
  return { precursorMz: spectra[0].path[0], charge: null, polarity, spectra: indexed, ms1: null, notes: [], ...facts };
}
