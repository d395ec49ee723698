/** From the scans of a run to the trees of its precursor ions. */
import type { AssembledTree, Assembly, IsolationWindow, Polarity, RunInfo, Scan, TreeSpectrum } from '../model';
import { groupScans, timeSpan, type PrecursorGroup, type SpectrumGroup } from './group';
import { mergePeaks } from './merge';
import { SurveyScans } from './survey-scans';

export interface AssembleOptions {
  /** only the tree whose precursor ion lies within its isolation window, or 0.01, of this m/z (the nearest one). */
  precursorMz?: number;
  /** keep spectra of the same path but different collision energy apart. */
  separateEnergies?: boolean;
}

const NEAR = 0.01;

function unique<T>(values: readonly T[]): T[] {
  return [...new Set(values)];
}

function isolationOf(spectrum: SpectrumGroup): IsolationWindow | null {
  const window = spectrum.scans.map((scan) => scan.own.record?.isolation).find(Boolean);
  return window ? { ...window, target: spectrum.path[spectrum.path.length - 1] } : null;
}

function toSpectrum(spectrum: SpectrumGroup, index: number, scans: readonly Scan[]): TreeSpectrum {
  const records = spectrum.scans.map((scan) => scan.own.record).filter((record) => record !== null);
  const analyser = spectrum.scans[0].header.analyser;
  const merged = mergePeaks(
    spectrum.scans.map((scan) => scans[scan.position].peaks),
    analyser
  );
  return {
    index,
    level: spectrum.level,
    path: spectrum.path,
    parent: spectrum.parent,
    linkedBy: spectrum.linkedBy,
    isolation: isolationOf(spectrum),
    scanIds: spectrum.scans.map((scan) => scan.header.id),
    activations: unique(records.flatMap((record) => record.activations)),
    energies: unique(records.map((record) => record.energy).filter((energy) => energy !== null)).sort((a, b) => a - b),
    energyUnit: records.find((record) => record.energyUnit !== null)?.energyUnit ?? null,
    analyser,
    time: timeSpan(spectrum.scans),
    peaks: merged.peaks,
    scanCounts: merged.scanCounts
  };
}

function pathText(path: readonly number[]): string {
  return path.map((mz) => mz.toFixed(4)).join(' > ');
}

function notesOf(group: PrecursorGroup, assumed: boolean): string[] {
  const notes: string[] = [];
  if (!group.spectra.some((spectrum) => spectrum.level === 2))
    notes.push('The MS2 spectrum of this precursor ion was not measured.');
  for (const spectrum of group.spectra) {
    const where = `MS${spectrum.level} of m/z ${pathText(spectrum.path)}`;
    if (spectrum.level > 2 && spectrum.parent === null) {
      notes.push(`${where}: the MS${spectrum.level - 1} spectrum above it is not in the file.`);
    }
    const notches = Math.max(...spectrum.scans.map((scan) => scan.own.notches));
    if (notches > 1) notes.push(`${where}: ${notches} ions were isolated together; the path names one of them.`);
  }
  const charges = new Set(
    group.spectra
      .filter((spectrum) => spectrum.level === 2)
      .flatMap((spectrum) => spectrum.scans.map((scan) => scan.own.record?.charge ?? null))
      .filter((charge) => charge !== null)
  );
  if (charges.size > 1)
    notes.push(`The file states several charges for this ion (${[...charges].join(', ')}); the commonest is used.`);
  if (assumed) notes.push('The file states no polarity; positive is assumed.');
  return notes;
}

function toTree(group: PrecursorGroup, scans: readonly Scan[], run: RunInfo, survey: SurveyScans): AssembledTree {
  const known: Polarity | null = group.polarity ?? (run.polarity === 'mixed' ? null : run.polarity);
  return {
    precursorMz: group.mz,
    charge: group.charge,
    polarity: known ?? 'positive',
    spectra: group.spectra.map((spectrum, index) => toSpectrum(spectrum, index, scans)),
    ms1: survey.around(group),
    notes: notesOf(group, known === null)
  };
}

/** Distance of a precursor ion to the wanted m/z, or null when it lies outside its isolation window and 0.01. */
function distance(group: PrecursorGroup, wanted: number): number | null {
  const window = group.spectra.find((spectrum) => spectrum.level === 2);
  const isolation = window ? isolationOf(window) : null;
  const off = Math.min(Math.abs(group.mz - wanted), Math.abs(group.isolatedMz - wanted));
  const side = wanted < group.isolatedMz ? isolation?.lower : isolation?.upper;
  return off <= Math.max(NEAR, side ?? 0) ? off : null;
}

function selectGroups(groups: PrecursorGroup[], wanted: number | undefined): PrecursorGroup[] {
  if (wanted === undefined) return groups;
  const near = groups.map((group) => ({ group, off: distance(group, wanted) })).filter((entry) => entry.off !== null);
  const best = Math.min(...near.map((entry) => entry.off ?? Infinity));
  return near.filter((entry) => (entry.off ?? Infinity) <= best + 1e-6).map((entry) => entry.group);
}

/**
 * Assembles the trees of a run: scans are joined by reference, precursor list, filter string and isolated m/z in that
 * order of trust; repeated scans of a path are merged (see `mergePeaks`); scans that cannot be joined are named.
 * @param scans all scans in the order of the file, with centroided peaks
 * @param run facts of the file; its polarity stands in where a scan states none
 */
export function assemble(scans: Iterable<Scan>, run: RunInfo, options: AssembleOptions = {}): Assembly {
  const list = Array.isArray(scans) ? (scans as Scan[]) : [...scans];
  const grouping = groupScans(list, (position) => list[position].peaks, {
    separateEnergies: options.separateEnergies ?? false
  });
  const survey = new SurveyScans(list);
  return {
    trees: selectGroups(grouping.groups, options.precursorMz).map((group) => toTree(group, list, run, survey)),
    orphans: grouping.orphans.map(({ header, reason }) => ({ scanId: header.id, level: header.level, reason })),
    warnings: grouping.warnings
  };
}
