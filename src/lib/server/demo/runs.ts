import { BACKGROUND_IONS, formatFormula, ionFormulaOf, ionMz, parseAdduct, parseFormula } from '$lib/core/chem';
import type { PrecursorRecord } from '$lib/core/model';
import { writeMzml, type ScanToWrite, type StreamingHash } from '$lib/core/mzml';
import { isotopePeaks, measured, mzOf, productPeaks, type TruePeak } from './peaks';
import { chanceOf, type Chance } from './random';
import type { Compound, DemoRun, Stage } from './scheme';

/** s from one scan to the next */
const SCAN_TIME = 0.42;
/** counts below which nothing is seen, as a share of the strongest true peak, and at least */
const FLOOR_SHARE = 4e-4;
const FLOOR = 40;
/** Fragment scans are taken while the compound's current is above this share of its highest. */
const TRIGGER = 0.06;
/** highest counts of an ion of the solvent in MS1 */
const BACKGROUND = 4e4;

interface Recording {
  run: DemoRun;
  chance: Chance;
  scans: ScanToWrite[];
  /** s */
  time: number;
}

/** Ion formula of a compound's precursor. */
export function precursorFormula(compound: Compound): string {
  const ion = ionFormulaOf(parseFormula(compound.formula), parseAdduct(compound.adduct));
  if (!ion) throw new RangeError(`${compound.formula} cannot form ${compound.adduct}.`);
  return formatFormula(ion);
}

const elution = ({ apex, width }: Compound, time: number): number => Math.exp(-(((time - apex) / width) ** 2) / 2);

/** Native ids in the style that fits the analyser. */
const nativeId = (run: DemoRun, number: number): string =>
  run.analyser === 'tof' ? `scan=${number}` : `controllerType=0 controllerNumber=1 scan=${number}`;

function record(on: Recording, level: number, peaks: TruePeak[], below: number, precursors: PrecursorRecord[]): string {
  const { run, scans, chance } = on;
  const id = nativeId(run, scans.length + 1);
  const strongest = peaks.reduce((top, [, counts]) => Math.max(top, counts), 0);
  const floor = Math.max(FLOOR, strongest * FLOOR_SHARE);
  scans.push({
    id,
    level,
    polarity: run.polarity,
    analyser: run.analyser,
    centroided: true,
    time: Math.round(on.time * 1000) / 1000,
    peaks: measured(run, chance, peaks, floor, below),
    precursors
  });
  on.time += SCAN_TIME;
  return id;
}

function survey(on: Recording): string {
  const { run, time } = on;
  const peaks: TruePeak[] = [];
  for (const compound of run.compounds)
    peaks.push(...isotopePeaks(run, precursorFormula(compound), compound.height * elution(compound, time)));
  for (const { formula, charge } of BACKGROUND_IONS) {
    const mz = ionMz(parseFormula(formula), charge);
    const shown = charge === (run.polarity === 'positive' ? 1 : -1) && mz > run.range[0] && mz < run.range[1];
    if (shown) peaks.push([mz, BACKGROUND * 0.1 ** (1.5 * on.chance.uniform())]);
  }
  return record(on, 1, peaks, run.range[1], []);
}

/** Where each spectrum of a compound in one cycle came from, by its isolated path. */
type Parents = Map<string, string>;
const key = (path: readonly string[]) => path.join('>');

function fragment(on: Recording, compound: Compound, stage: Stage, energy: number, parents: Parents): void {
  const { run } = on;
  const ion = precursorFormula(compound);
  const isolated = stage.path.at(-1) ?? ion;
  const mz = Math.round(mzOf(run, isolated) * 1e4) / 1e4;
  const above = stage.path.length === 0 ? null : stage.path.slice(0, -1);
  const spectrumRef = (above === null ? parents.get('MS1') : parents.get(key(above))) ?? null;
  const counts = compound.height * elution(compound, on.time) * stage.yield;
  const id = record(on, stage.path.length + 2, productPeaks(run, stage, isolated, energy, counts), mz + 2, [
    {
      spectrumRef,
      level: null,
      isolation: { target: mz, lower: run.isolation, upper: run.isolation },
      selectedMz: mz,
      charge: 1,
      intensity: null,
      activations: [stage.activation],
      energy,
      energyUnit: run.energyUnit
    }
  ]);
  parents.set(key(stage.path), id);
}

/** All scans of a run, in the order in which they are taken: survey, then every stage of what elutes. */
export function scansOf(run: DemoRun): ScanToWrite[] {
  const on: Recording = { run, chance: chanceOf(run.seed), scans: [], time: 0.3 };
  while (on.time < run.length) {
    const parents: Parents = new Map([['MS1', survey(on)]]);
    const eluting = run.compounds.filter((compound) => elution(compound, on.time) > TRIGGER);
    for (const compound of eluting)
      for (const stage of compound.stages)
        for (const energy of stage.energies) fragment(on, compound, stage, energy, parents);
    // Between the peaks only surveys are taken, more slowly.
    if (eluting.length === 0) on.time += 1.5;
  }
  return on.scans;
}

/** The run as the bytes of an indexed mzML file. @param sha1 for the checksum that the file states */
export function demoFile(run: DemoRun, sha1: () => StreamingHash): Uint8Array {
  const { id, ionSource, analyser, instrument, startTime, sample } = run;
  const scans = scansOf(run);
  return writeMzml(
    { id, scans, ionSource, analyser, instrument, startTime, sample: { name: sample } },
    { sha1, mzBits: 64, intensityBits: 32 }
  );
}
