import { ionMz, parseFormula } from '$lib/core/chem';
import { ionIsotopePeaks } from '$lib/core/isotope';
import type { PeakList } from '$lib/core/model';
import type { Chance } from './random';
import type { DemoRun, ProductIon, Stage } from './scheme';

/** A peak before it is measured: true m/z, counts. */
export type TruePeak = [mz: number, counts: number];

const sign = (run: DemoRun) => (run.polarity === 'positive' ? 1 : -1);

/** m/z of a singly charged ion of the run, by the core's masses. */
export const mzOf = (run: DemoRun, formula: string): number => ionMz(parseFormula(formula), sign(run));

/** Isotope peaks of an ion as MS1 shows them. @param counts of the monoisotopic peak */
export const isotopePeaks = (run: DemoRun, formula: string, counts: number): TruePeak[] =>
  ionIsotopePeaks(parseFormula(formula), sign(run), 1e-3).map(({ mz, relative }) => [mz, relative * counts]);

/** Share of its greatest height that a product ion has at an energy: a bell over the energy, 12 units wide. */
const atEnergy = ({ best }: ProductIon, energy: number): number =>
  best === undefined ? 1 : Math.exp(-(((energy - best) / 12) ** 2) / 2);

/** Product ions of a stage at one energy. @param counts of an ion of 100 percent; @param isolated formula */
export function productPeaks(run: DemoRun, stage: Stage, isolated: string, energy: number, counts: number): TruePeak[] {
  const peak = (ion: ProductIon): TruePeak => [
    mzOf(run, ion.formula),
    (counts * atEnergy(ion, energy) * ion.percent) / 100
  ];
  const middle = stage.energies[Math.floor(stage.energies.length / 2)];
  // The isolated ion survives less the harder it is hit.
  const survival = (stage.left / 100) * Math.exp((middle - energy) / 10);
  return [
    ...stage.products.map(peak),
    ...(stage.coIsolated ?? []).map(peak),
    ...(stage.stray ?? []).map(({ mz, percent }): TruePeak => [mz, (counts * percent) / 100]),
    [mzOf(run, isolated), counts * survival]
  ];
}

/** Noise: peaks of no meaning anywhere in the range, few of them above a thousandth of the strongest ion. */
function noise(run: DemoRun, chance: Chance, floor: number, below: number): TruePeak[] {
  const count = 1 + Math.floor(chance.uniform() * 4);
  const [low] = run.range;
  return Array.from({ length: count }, () => [
    low + chance.uniform() * (below - low),
    floor * (1 + 0.8 * -Math.log(1 - chance.uniform()))
  ]);
}

/**
 * What the analyser makes of true peaks: a shift, scatter that grows for weak peaks, counting errors, noise, and
 * nothing below the limit of detection.
 * @param floor counts at the limit of detection
 * @param below m/z up to which noise is spread
 */
export function measured(run: DemoRun, chance: Chance, peaks: TruePeak[], floor: number, below: number): PeakList {
  const seen = peaks.map(([mz, counts]): TruePeak => {
    const weak = Math.min(3, Math.sqrt((40 * floor) / Math.max(counts, floor)));
    const ppm = run.shift + run.scatter * (0.6 + 0.4 * weak) * chance.normal();
    return [mz * (1 + ppm * 1e-6), counts * Math.max(0.05, 1 + 0.06 * chance.normal())];
  });
  const all = [...seen.filter(([, counts]) => counts > floor), ...noise(run, chance, floor, below)];
  all.sort(([a], [b]) => a - b);
  return { mz: Float64Array.from(all, ([mz]) => mz), intensity: Float64Array.from(all, ([, counts]) => counts) };
}
