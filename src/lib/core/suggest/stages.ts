import { CARBON_ISOTOPE_SPACING } from '../chem';
import { isUnitResolution, toleranceFor, windowAt } from '../formula/tolerance';
import { type AssembledTree, type IonConstraint, type Tolerance, type TreeSpectrum } from '../model';
import { expectedSigma } from './mass-width';

export type PeakRole = 'product' | 'precursor' | 'isotope' | 'above-precursor';

/** One peak of one merged spectrum, as the search sees it. */
export interface StagePeak {
  spectrum: number;
  /** position in the spectrum's peak list. */
  index: number;
  mz: number;
  intensity: number;
  /** intensity relative to the base peak of its spectrum. */
  relative: number;
  role: PeakRole;
  /** half window, m/z. */
  window: number;
  /** standard deviation of the m/z. */
  sigma: number;
  confirmed: string | null;
  /** formulas that a person excluded; null excludes all. */
  rejected: readonly (string | null)[];
}

/** An ion that was isolated, its spectra, and the isolated product ions below it. */
export interface StageNode {
  id: number;
  level: number;
  /** m/z of the isolated ion. */
  mz: number;
  /** half window in which this ion's own m/z is known when no peak shows it. */
  window: number;
  path: readonly number[];
  spectra: number[];
  peaks: StagePeak[];
  children: StageNode[];
  unitResolution: boolean;
  /** water from the residual gas may attach (ion traps). */
  trap: boolean;
}

/** Isolated m/z of one path are the same ion when they differ by less than this. */
const SAME_ION = 0.005;
/** A unit-resolution precursor may be recorded this far from its peak. */
const UNIT_OFFSET = 0.5;
/** Highest 13C satellite relative to its ion that organic ions of ordinary size reach, per m/z unit. */
const SATELLITE_PER_MZ = 0.00115;

/** Stages of a tree by isolation path; stages that were isolated but not measured get nodes without spectra. */
export function buildStages(
  tree: AssembledTree,
  asked: Tolerance | null,
  constraints: readonly IonConstraint[]
): StageNode {
  const nodes: StageNode[] = [];
  const node = (level: number, path: readonly number[], parent: StageNode | null): StageNode => {
    const mz = path[path.length - 1] ?? tree.precursorMz;
    const found = nodes.find(
      (n) =>
        n.level === level && n.path.length === path.length && n.path.every((v, i) => Math.abs(v - path[i]) < SAME_ION)
    );
    if (found) return found;
    const made: StageNode = {
      id: nodes.length,
      level,
      mz,
      window: 0.01,
      path,
      spectra: [],
      peaks: [],
      children: [],
      unitResolution: false,
      trap: false
    };
    nodes.push(made);
    parent?.children.push(made);
    return made;
  };
  const root = node(2, [tree.precursorMz], null);
  for (const spectrum of tree.spectra) {
    if (spectrum.level < 2) continue;
    let at = root;
    for (let level = 3; level <= spectrum.level; level++) at = node(level, spectrum.path.slice(0, level - 1), at);
    attach(at, spectrum, asked, constraints);
  }
  return root;
}

function attach(
  node: StageNode,
  spectrum: TreeSpectrum,
  asked: Tolerance | null,
  constraints: readonly IonConstraint[]
) {
  const tolerance = asked ?? toleranceFor(spectrum.analyser);
  // A window asked for in ppm alone says nothing of light ions, where locating the peak limits: the analyser's floor holds.
  const floor = asked?.mda === 0 ? toleranceFor(spectrum.analyser).mda * 1e-3 : 0;
  node.spectra.push(spectrum.index);
  node.unitResolution ||= isUnitResolution(asked?.mda === 0 ? toleranceFor(spectrum.analyser) : tolerance);
  node.trap ||= spectrum.analyser === 'ion-trap';
  node.window = node.unitResolution ? UNIT_OFFSET : Math.max(0.01, windowAt(tolerance, node.mz));
  const { mz, intensity } = spectrum.peaks;
  const base = intensity.reduce((a, b) => Math.max(a, b), 0) || 1;
  const own = constraints.filter((c) => c.spectrum === spectrum.index);
  for (let i = 0; i < mz.length; i++) {
    const window = Math.max(windowAt(tolerance, mz[i]), floor);
    const claims = own.filter((c) => Math.abs(c.mz - mz[i]) < 1e-4);
    node.peaks.push({
      spectrum: spectrum.index,
      index: i,
      mz: mz[i],
      intensity: intensity[i],
      relative: intensity[i] / base,
      role: 'product',
      window,
      sigma: expectedSigma(spectrum.analyser, asked, mz[i], window),
      confirmed: claims.find((c) => c.kind === 'confirmed')?.formula ?? null,
      rejected: claims.filter((c) => c.kind === 'rejected').map((c) => c.formula)
    });
  }
  const peaks = node.peaks.filter((p) => p.spectrum === spectrum.index);
  const upper = spectrum.isolation
    ? spectrum.isolation.target + (spectrum.isolation.upper ?? (node.unitResolution ? 1.5 : 0.5))
    : node.mz + (node.unitResolution ? 1.5 : 0.5);
  markIsotopes(peaks, upper >= node.mz + 0.99);
}

/** Peaks one 13C above a stronger ion, where the window let the heavier isotopologue of the precursor in. */
function markIsotopes(peaks: StagePeak[], heavyIsolated: boolean): void {
  if (!heavyIsolated) return;
  for (const peak of peaks) {
    if (peak.confirmed) continue;
    const source = peaks.find((other) => {
      const gap = peak.mz - other.mz - CARBON_ISOTOPE_SPACING;
      const reach = Math.min(other.window, 0.15);
      return Math.abs(gap) <= reach && peak.intensity <= other.intensity * Math.max(0.03, SATELLITE_PER_MZ * other.mz);
    });
    if (source) peak.role = 'isotope';
  }
}

/**
 * Sets the roles that depend on the precursor ion's calculated m/z: the intact precursor, and ions above it, which a
 * singly charged precursor cannot give.
 */
export function markPrecursor(node: StageNode, precursorMz: number, charge: number): void {
  for (const peak of node.peaks) {
    const near = Math.max(peak.window, node.unitResolution ? UNIT_OFFSET : 0);
    if (Math.abs(peak.mz - precursorMz) <= near) {
      if (peak.role !== 'isotope') peak.role = 'precursor';
    } else if (peak.mz > precursorMz && charge === 1) {
      if (peak.role === 'product' || peak.role === 'precursor') peak.role = 'above-precursor';
    } else if (peak.role !== 'isotope') {
      peak.role = 'product';
    }
  }
}

/**
 * The peak of a stage that a deeper stage isolated: the strongest within the child's window, else, at unit
 * resolution, one nominal unit above it. −1 when no peak shows it.
 */
export function isolatedPeak(node: StageNode, child: StageNode): number {
  const strongest = (low: number, high: number) => {
    let best = -1;
    node.peaks.forEach((peak, i) => {
      if (peak.mz < low || peak.mz > high) return;
      if (best < 0 || peak.intensity > node.peaks[best].intensity) best = i;
    });
    return best;
  };
  const reach = Math.max(child.window, node.unitResolution ? UNIT_OFFSET : 0.01);
  const direct = strongest(child.mz - reach, child.mz + reach);
  return direct < 0 && node.unitResolution ? strongest(child.mz, child.mz + 1.05) : direct;
}
