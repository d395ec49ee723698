import { createHash } from 'node:crypto';
import { ionMz, parseFormula } from '$lib/core/chem';
import { ionIsotopePeaks } from '$lib/core/isotope';
import type { PeakList, PrecursorRecord } from '$lib/core/model';
import { writeMzml, type ScanToWrite } from '$lib/core/mzml';

/** Neutral formula of the invented molecule, and its protonated ion. */
export const MOLECULE = 'C17H19NO4';
export const PRECURSOR = 'C17H20NO4';

/** Heights in percent; every ion is a part of the one isolated above it. */
const SPECTRA: { isolated: readonly string[]; ions: Readonly<Record<string, number>> }[] = [
  {
    isolated: [PRECURSOR],
    ions: {
      C17H20NO4: 18,
      C17H18NO3: 100,
      C16H16NO3: 46,
      C9H12NO2: 31,
      C16H14NO2: 24,
      C8H9O2: 17,
      C9H10NO: 12,
      C8H7O2: 7
    }
  },
  {
    isolated: [PRECURSOR, 'C17H18NO3'],
    ions: { C17H18NO3: 12, C16H14NO2: 100, C16H18NO2: 39, C9H10NO: 27, C15H14NO: 15, C8H9O: 9 }
  },
  { isolated: [PRECURSOR, 'C17H18NO3', 'C16H14NO2'], ions: { C16H14NO2: 9, C15H14NO: 100, C15H12O: 33, C14H11O: 21 } }
];
/** m/z that no formula explains */
export const UNEXPLAINED = 187.9341;

/** ppm; fixed for each formula, so that a test knows the m/z that it will find on the screen */
const errorOf = (formula: string): number =>
  ([...formula].reduce((sum, c) => sum + c.charCodeAt(0), 0) % 5) * 0.3 - 0.6;

/** m/z of a protonated ion of the molecule as the file has it. */
export const mzOf = (formula: string): number => ionMz(parseFormula(formula), 1) * (1 + errorOf(formula) * 1e-6);

/** The same as the screens print it. */
export const mzText = (formula: string): string => mzOf(formula).toFixed(4);

function peakList(peaks: [mz: number, intensity: number][]): PeakList {
  peaks.sort(([a], [b]) => a - b);
  return { mz: Float64Array.from(peaks, ([mz]) => mz), intensity: Float64Array.from(peaks, ([, counts]) => counts) };
}

function precursorOf(isolated: readonly string[], spectrumRef: string): PrecursorRecord {
  const mz = mzOf(isolated[isolated.length - 1]);
  return {
    ...{ spectrumRef, level: null, isolation: { target: mz, lower: 0.5, upper: 0.5 }, selectedMz: mz, charge: 1 },
    ...{ intensity: null, activations: ['CID'], energy: 30, energyUnit: 'eV' }
  };
}

/** Survey, MS2, MS3 and MS4 scan, again and again. @param cycles how often */
export function inventedScans(cycles: number): ScanToWrite[] {
  const scans: ScanToWrite[] = [];
  const add = (level: number, peaks: PeakList, precursors: PrecursorRecord[]): string => {
    const id = `controllerType=0 controllerNumber=1 scan=${scans.length + 1}`;
    const time = Math.round(scans.length * 420) / 1000;
    scans.push({ id, level, polarity: 'positive', analyser: 'orbitrap', centroided: true, time, peaks, precursors });
    return id;
  };
  for (let cycle = 0; cycle < cycles; cycle++) {
    const counts = 1e6 * (1 + (cycle % 3) / 10);
    const shift = mzOf(PRECURSOR) / ionMz(parseFormula(PRECURSOR), 1);
    const isotopes = ionIsotopePeaks(parseFormula(PRECURSOR), 1, 1e-3);
    let above = add(1, peakList(isotopes.map(({ mz, relative }) => [mz * shift, relative * counts * 8])), []);
    for (const { isolated, ions } of SPECTRA) {
      const peaks = Object.entries(ions).map(([formula, height]): [number, number] => [
        mzOf(formula),
        (height * counts) / 100
      ]);
      if (isolated.length === 1) peaks.push([UNEXPLAINED, 0.06 * counts]);
      above = add(isolated.length + 1, peakList(peaks), [precursorOf(isolated, above)]);
    }
  }
  return scans;
}

/**
 * An mzML file of an invented molecule: ions from formulas through the core's masses, within a ppm.
 * @param cycles scans of each stage; @param id tells two files of the same scans apart
 */
export function inventedFile(cycles = 4, id = 'invented'): Buffer {
  const sha1 = () => {
    const hash = createHash('sha1');
    return { update: (bytes: Uint8Array) => void hash.update(bytes), hex: () => hash.digest('hex') };
  };
  return Buffer.from(
    writeMzml(
      { id, scans: inventedScans(cycles), ionSource: 'ESI', analyser: 'orbitrap' },
      { sha1, compression: 'none' }
    )
  );
}
