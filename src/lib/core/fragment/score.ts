import { formatFormula, parseFormula } from '../chem';
import { disconnect, type DisconnectOptions } from './disconnect';
import { explainIon, indexParts, type Explanation } from './explain';
import type { AtomSet, MoleculeGraph } from './graph';

/** A spectrum as structures are compared with it: assigned ions only. */
export interface AssignedSpectrum {
  level: number;
  /** index of the spectrum it hangs on, null for MS2. */
  parent: number | null;
  /** ion formula of the isolated precursor ion, null when it has none. */
  precursorFormula: string | null;
  ions: { mz: number; intensity: number; formula: string | null }[];
}

export interface ExplainedIon {
  spectrum: number;
  ion: number;
  /** least-cost atom sets, as atom indices of the structure; empty: not explained. */
  explanations: Explanation[];
}

export interface StructureScore {
  structure: MoleculeGraph;
  /** share 0..1 of the assigned ion current that the structure explains, each stage. */
  explainedByStage: Record<string, number>;
  explained: number;
  /** sum over ions of sqrt(relative intensity) / (1 + cost); higher is better, comparable within one tree only. */
  score: number;
  ions: ExplainedIon[];
  /** false when the disconnection stopped at its limit. */
  complete: boolean;
}

/** Ion formula without the metal of an adduct, which no structure contains. */
const withoutMetal = (formula: string): string => {
  const { Na: _na, K: _k, Li: _li, ...rest } = parseFormula(formula);
  return formatFormula(rest);
};

/**
 * How well one structure explains the ions of a tree over all stages: an ion of MSn must lie within the atoms of its
 * measured precursor ion. Says "possible", never "proven": rearrangements are outside bond disconnection.
 */
export function scoreStructure(
  structure: MoleculeGraph,
  spectra: readonly AssignedSpectrum[],
  options: DisconnectOptions = {}
): StructureScore {
  const parts = disconnect(structure, options);
  const index = indexParts(parts);
  const inside = precursorSets(spectra, index);
  const ions: ExplainedIon[] = [];
  const stage: Record<string, [explained: number, all: number]> = {};
  let score = 0;
  spectra.forEach((spectrum, s) => {
    const strongest = Math.max(0, ...spectrum.ions.map((ion) => ion.intensity));
    spectrum.ions.forEach((ion, i) => {
      if (!ion.formula) return;
      const explanations = explainIon(index, withoutMetal(ion.formula), inside[s]);
      ions.push({ spectrum: s, ion: i, explanations });
      const sums = (stage[spectrum.level] ??= [0, 0]);
      sums[1] += ion.intensity / strongest;
      if (!explanations.length) return;
      sums[0] += ion.intensity / strongest;
      score += Math.sqrt(ion.intensity / strongest) / (1 + explanations[0].cost);
    });
  });
  const total = Object.values(stage).reduce(([e, a], [x, y]) => [e + x, a + y], [0, 0]);
  return {
    structure,
    explainedByStage: Object.fromEntries(Object.entries(stage).map(([level, [e, a]]) => [level, a ? e / a : 0])),
    explained: total[1] ? total[0] / total[1] : 0,
    score,
    ions,
    complete: parts.complete
  };
}

/** For each spectrum the atom sets its isolated ion can have; null (anything) where it has no formula or no explanation. */
function precursorSets(
  spectra: readonly AssignedSpectrum[],
  index: ReturnType<typeof indexParts>
): (AtomSet[] | null)[] {
  const sets: (AtomSet[] | null)[] = [];
  spectra.forEach((spectrum, s) => {
    sets[s] = null;
    if (!spectrum.precursorFormula) return;
    const above = spectrum.parent === null ? null : sets[spectrum.parent];
    const found = explainIon(index, withoutMetal(spectrum.precursorFormula), above);
    if (found.length) sets[s] = found.map((explanation) => explanation.atoms);
  });
  return sets;
}

/** Scores several candidate structures and ranks them, best first; ties keep the order given. */
export function rankStructures(
  structures: readonly MoleculeGraph[],
  spectra: readonly AssignedSpectrum[],
  options: DisconnectOptions & { onProgress?: (done: number, total: number) => void } = {}
): StructureScore[] {
  const scores = structures.map((structure, i) => {
    options.onProgress?.(i, structures.length);
    return scoreStructure(structure, spectra, options);
  });
  return scores.sort((a, b) => b.score - a.score);
}
