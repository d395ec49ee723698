import { type Adduct, add, formatFormula, parseAdduct, usualAdducts } from '../chem';
import { CoreError } from '../errors';
import { errorPpm, isUnitResolution, toleranceFor, windowAt } from '../formula/tolerance';
import { chargeFromSpacing, isotopeLogLikelihood } from '../isotope';
import {
  type AssembledTree,
  type FormulaCandidate,
  type Suggestion,
  type SuggestOptions,
  type Tolerance
} from '../model';
import { Annotator, openIons } from './annotate';
import { type IonSpace } from './ion-space';
import { LossScorer } from './loss-score';
import { sumTerms } from './peak-candidates';
import {
  countsIn,
  enumeratePrecursors,
  ionSpaceFor,
  knownPrecursor,
  precursorOf,
  type PrecursorCandidate
} from './precursors';
import { Prefilter } from './prefilter';
import { StageSolver, type SolverLimits } from './stage-solver';
import { adaptSigma, sharpen, unambiguousErrors } from './mass-width';
import { buildStages, markPrecursor, type StageNode, type StagePeak } from './stages';
import { WEIGHTS } from './weights';

/** How a long computation reports and is stopped; both are called between candidates. */
export interface SuggestControl {
  onProgress?: (done: number, total: number, what: string) => void;
  isCancelled?: () => boolean;
}

const RANKING: SolverLimits = { maxPeaks: 35, maxCandidates: 10, maxWork: 0 };
const FINAL: SolverLimits = { maxPeaks: 2000, maxCandidates: 60, maxWork: 1_000_000 };
const FINAL_UNIT: SolverLimits = { maxPeaks: 400, maxCandidates: 24, maxWork: 300_000 };
/** For the share explained under precursor formulas other than the first. */
const OVERVIEW: SolverLimits = { maxPeaks: 100, maxCandidates: 6, maxWork: 0 };
/** Precursor candidates whose full trees are computed. */
const FULL_TREES = 100;
/** The same for multiply charged ions, whose trees are costly and whose isotope pattern tells more beforehand. */
const FULL_TREES_OF_MANY_CHARGES = 30;

/**
 * Proposes formulas for a whole tree: ranks the precursor's formulas by the best tree that each allows over all
 * stages, then annotates every ion under the first (or the given) one. Deterministic.
 * @throws CoreError bad-formula, bad-adduct, too-many-candidates, cancelled
 */
export function suggest(tree: AssembledTree, options: SuggestOptions, control: SuggestControl = {}): Suggestion {
  return new Suggester(tree, options, control).run();
}

class Suggester {
  private readonly sign: 1 | -1;
  private readonly charge: number;
  private readonly adducts: Adduct[];
  private readonly root: StageNode;
  private readonly notes: string[];
  private readonly water: boolean;

  constructor(
    private readonly tree: AssembledTree,
    private readonly options: SuggestOptions,
    private readonly control: SuggestControl
  ) {
    this.sign = tree.polarity === 'positive' ? 1 : -1;
    this.notes = [...tree.notes];
    this.adducts = this.chooseAdducts();
    this.charge = Math.abs(this.adducts[0]?.charge ?? 1);
    this.root = buildStages(tree, options.tolerance, options.constraints);
    this.water = hasTrap(this.root);
    this.markRoles(this.root);
  }

  run(): Suggestion {
    if (this.options.formula !== null) return this.runKnown(this.options.formula);
    if (this.adducts.length === 0) return this.unknown('No ion type of this polarity and charge is known.');
    if (this.root.unitResolution || !this.hasAccurateMass()) {
      return this.unknown(
        'These spectra have unit resolution: the precursor formula cannot be found from its mass. Give the formula of M to annotate all stages.'
      );
    }
    return this.runRanked();
  }

  private chooseAdducts(): Adduct[] {
    const { adducts, ionSource } = this.options;
    if (adducts.length > 0) {
      const parsed = adducts.map((name) => parseAdduct(name));
      const fitting = parsed.filter((a) => Math.sign(a.charge) === this.sign);
      if (fitting.length === 0) {
        throw new CoreError(
          'bad-adduct',
          `${adducts.join(', ')} does not fit a ${this.tree.polarity} ion.`,
          undefined,
          'Choose an ion type of the spectrum’s polarity.'
        );
      }
      return fitting;
    }
    const stated = this.tree.charge;
    const spacing = this.tree.ms1 ? chargeFromSpacing(this.tree.ms1, this.tree.precursorMz, { ppm: 10, mda: 5 }) : null;
    if (stated === null && spacing !== null && spacing > 1)
      this.notes.push(`The charge ${spacing} was read from the isotope spacing in MS1.`);
    return usualAdducts(ionSource, this.tree.polarity, stated ?? spacing ?? 1);
  }

  private precursorTolerance(): Tolerance {
    const first = this.tree.spectra.find((s) => s.level === 2) ?? this.tree.spectra[0];
    return this.options.tolerance ?? toleranceFor(first?.analyser ?? 'unknown');
  }

  private hasAccurateMass(): boolean {
    return this.tree.spectra.length > 0 && !isUnitResolution(this.precursorTolerance());
  }

  private markRoles(node: StageNode): void {
    markPrecursor(node, node.mz, this.charge);
    node.children.forEach((child) => this.markRoles(child));
  }

  private checkCancelled(): void {
    if (this.control.isCancelled?.()) throw new CoreError('cancelled', 'The suggestion was cancelled.');
  }

  private runKnown(formula: string): Suggestion {
    const { neutral, made, ions } = knownPrecursor(formula, this.adducts, this.water);
    const mz = this.tree.precursorMz;
    const losses = new LossScorer(ions);
    const window = this.root.unitResolution ? 0.5 : windowAt(this.precursorTolerance(), mz);
    const candidates = made.flatMap(
      ({ adduct }) => precursorOf(ions, countsIn(ions, neutral), adduct, mz, window / WEIGHTS.windowSigmas) ?? []
    );
    candidates.sort((a, b) => Math.abs(a.errorPpm) - Math.abs(b.errorPpm));
    const chosen = candidates[0];
    const calculated = ions.mz(chosen.ion, chosen.adduct.charge);
    if (Math.abs(mz - calculated) > Math.max(window, this.root.unitResolution ? 1.1 : 0)) {
      this.notes.push(
        `The precursor m/z ${mz.toFixed(4)} is ${errorPpm(mz, calculated).toFixed(1)} ppm from ${chosen.adduct.name} of ${formula} (${calculated.toFixed(4)}).`
      );
    }
    this.adapt(ions, [chosen]);
    return this.finish(ions, losses, [chosen]);
  }

  private runRanked(): Suggestion {
    const mz = this.tree.precursorMz;
    const window = windowAt(this.precursorTolerance(), mz);
    const largest = (mz + 1) * this.charge + 20;
    const ions = ionSpaceFor(this.options.elements, this.adducts, this.water, largest);
    const all = enumeratePrecursors(
      ions,
      this.options.elements,
      this.adducts,
      mz,
      window,
      window / WEIGHTS.windowSigmas
    );
    if (all.length === 0) {
      return this.unknown(`No formula of the allowed elements lies within the window at m/z ${mz.toFixed(4)}.`);
    }
    const losses = new LossScorer(ions);
    this.addIsotopeTerms(ions, all);
    const chosen = this.preselect(ions, losses, all, window);
    this.adapt(ions, chosen.slice(0, 10));
    const solver = new StageSolver(ions, losses, this.sign, RANKING);
    const rated = chosen.map((candidate, i) => {
      this.checkCancelled();
      this.control.onProgress?.(i, chosen.length, 'trees of precursor formulas');
      const tree = solver.solve(this.root, candidate.ion, this.charge).score;
      candidate.terms['fragmentation tree'] = tree;
      return { candidate, score: candidate.prior + tree };
    });
    rated.sort((a, b) => b.score - a.score || a.candidate.ion.key - b.candidate.ion.key);
    return this.finish(
      ions,
      losses,
      rated.map((r) => r.candidate)
    );
  }

  private addIsotopeTerms(ions: IonSpace, all: PrecursorCandidate[]): void {
    const { ms1 } = this.tree;
    if (!ms1) return;
    for (const candidate of all) {
      const likelihood = isotopeLogLikelihood(ms1, ions.composition(candidate.ion.key), candidate.adduct.charge, {
        ppm: 10,
        mda: 3
      });
      if (likelihood === null) continue;
      candidate.terms['isotope pattern'] = likelihood;
      candidate.prior += likelihood;
    }
  }

  /** Widths of the mass error from the ions that fit one formula only, under the most promising candidates. */
  private adapt(ions: IonSpace, candidates: readonly PrecursorCandidate[]): void {
    if (this.root.unitResolution) return;
    adaptSigma(
      allPeaks(this.root),
      candidates.flatMap((c) => unambiguousErrors(ions, this.root, c.ion, this.sign)).slice(0, 400)
    );
  }

  /** The candidates worth a full tree, by prior and a quick look at the MS2 spectrum. */
  private preselect(
    ions: IonSpace,
    losses: LossScorer,
    all: PrecursorCandidate[],
    window: number
  ): PrecursorCandidate[] {
    const most = this.charge === 1 ? FULL_TREES : FULL_TREES_OF_MANY_CHARGES;
    if (all.length <= most) return all;
    const peaks = this.root.peaks
      .filter((p) => p.role === 'product')
      .sort((a, b) => b.relative - a.relative || a.mz - b.mz)
      .slice(0, RANKING.maxPeaks);
    const filter =
      this.charge === 1 ? new Prefilter(ions, losses, peaks, this.tree.precursorMz, window, this.sign) : null;
    const rated = all.map((candidate, i) => {
      if (i % 500 === 0) {
        this.checkCancelled();
        this.control.onProgress?.(i, all.length, 'precursor formulas');
      }
      return { candidate, score: candidate.prior + (filter?.score(candidate) ?? 0) };
    });
    rated.sort((a, b) => b.score - a.score || a.candidate.ion.key - b.candidate.ion.key);
    this.notes.push(`Full trees were computed for the ${most} most promising of ${all.length} precursor formulas.`);
    return rated.slice(0, most).map((r) => r.candidate);
  }

  private finish(ions: IonSpace, losses: LossScorer, ranked: PrecursorCandidate[]): Suggestion {
    const limits = this.root.unitResolution ? FINAL_UNIT : FINAL;
    const solver = new StageSolver(ions, losses, this.sign, limits);
    const best = ranked[0];
    sharpen(allPeaks(this.root));
    this.checkCancelled();
    const result = solver.solve(this.root, best.ion, this.charge);
    best.terms['fragmentation tree'] ??= result.score;
    const annotator = new Annotator(this.tree, ions, solver, this.sign);
    annotator.stage(this.root, best.ion, this.charge);
    if (!result.proven) this.notes.push('The best tree was found by local search and is not proven to be the optimum.');
    const explained = explainedShare(annotator.spectra);
    const overview = new StageSolver(ions, losses, this.sign, OVERVIEW);
    const candidates = ranked
      .slice(0, this.options.top)
      .map((c, i) => this.report(ions, overview, c, i + 1, explained));
    return {
      charge: this.charge,
      adduct: best.adduct.name,
      candidates,
      spectra: annotator.spectra,
      explainedIntensity: explained,
      notes: this.notes
    };
  }

  private report(
    ions: IonSpace,
    solver: StageSolver,
    c: PrecursorCandidate,
    rank: number,
    ofBest: number
  ): FormulaCandidate {
    const neutral = Object.fromEntries(ions.symbols.map((s, i) => [s, c.neutral[i]]));
    return {
      rank,
      formula: formatFormula(add({}, neutral)),
      adduct: c.adduct.name,
      ionFormula: ions.text(c.ion.key),
      errorPpm: c.errorPpm,
      dbe: c.ion.dbe,
      score: sumTerms(c.terms),
      terms: c.terms,
      explainedIntensity: rank === 1 ? ofBest : this.shareUnder(ions, solver, c)
    };
  }

  private shareUnder(ions: IonSpace, solver: StageSolver, c: PrecursorCandidate): number {
    const annotator = new Annotator(this.tree, ions, solver, this.sign);
    annotator.stage(this.root, c.ion, this.charge);
    return explainedShare(annotator.spectra);
  }

  private unknown(why: string): Suggestion {
    return {
      charge: this.charge,
      adduct: this.options.adducts.length === 1 ? (this.adducts[0]?.name ?? null) : null,
      candidates: [],
      spectra: openIons(this.tree),
      explainedIntensity: 0,
      notes: [...this.notes, why]
    };
  }
}

const allPeaks = (node: StageNode): StagePeak[] => [...node.peaks, ...node.children.flatMap(allPeaks)];

const hasTrap = (node: StageNode): boolean => node.trap || node.children.some(hasTrap);

/** Share of the product ion current that has a formula; the intact precursor and isotope satellites do not count. */
function explainedShare(spectra: Suggestion['spectra']): number {
  let all = 0;
  let explained = 0;
  for (const ion of spectra.flat()) {
    if (ion.isPrecursor || ion.remark === 'isotope') continue;
    all += ion.intensity;
    if (ion.formula !== null) explained += ion.intensity;
  }
  return all > 0 ? explained / all : 0;
}
