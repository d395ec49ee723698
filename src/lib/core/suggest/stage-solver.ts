import { type IonFormula, type IonSpace } from './ion-space';
import { lossMassTerm, type LossScorer } from './loss-score';
import { massErrorTerm, intensityTerm, peakCandidates, type PeakCandidate, type PeakTarget } from './peak-candidates';
import { isolatedPeak, type StageNode, type StagePeak } from './stages';
import { solveTree, type TreeEdge, type TreeSolution, type TreeVertex } from './best-tree';
import { type ScoreTerms } from '../model';
import { WEIGHTS } from './weights';

/** A candidate of one ion of a stage as a vertex of that stage's tree. */
export interface StageVertex extends TreeVertex {
  candidate: PeakCandidate;
  /** best score of the deeper stages under this formula. */
  below: number;
}

/** The best tree of one stage under one formula of its isolated ion, deeper stages included. */
export interface StageResult {
  ion: IonFormula;
  charge: number;
  score: number;
  proven: boolean;
  /** the peak of each colour; null for isolated ions that no peak shows. */
  colours: ColourPeak[];
  vertices: StageVertex[];
  solution: TreeSolution;
  /** how many candidates were left out because a peak had too many. */
  dropped: number;
}

export interface ColourPeak {
  peak: StagePeak | null;
  target: PeakTarget;
  /** stages that isolated this ion. */
  children: StageNode[];
}

export interface SolverLimits {
  /** strongest ions per stage that take part. */
  maxPeaks: number;
  /** candidates per ion. */
  maxCandidates: number;
  /** see `SolveLimits`. */
  maxWork: number;
}

/** Reward that outweighs everything else, so that a confirmed formula is always part of the tree. */
const CONFIRMED = 1000;

/**
 * Solves the tree stage by stage: below an isolated ion everything depends on that ion's formula alone, so the best
 * sub-tree of a deeper stage is computed once per formula and added to that formula's vertex above. Together the
 * stages give the best tree that agrees with the isolation paths.
 */
export class StageSolver {
  private readonly results = new Map<string, StageResult>();

  constructor(
    private readonly ions: IonSpace,
    private readonly losses: LossScorer,
    private readonly sign: 1 | -1,
    private readonly limits: SolverLimits
  ) {}

  /** Best tree of a stage under a formula of its isolated ion. */
  solve(node: StageNode, ion: IonFormula, charge: number): StageResult {
    const id = `${node.id} ${ion.key} ${charge}`;
    let result = this.results.get(id);
    if (!result) this.results.set(id, (result = this.compute(node, ion, charge)));
    return result;
  }

  private compute(node: StageNode, ion: IonFormula, charge: number): StageResult {
    const colours = this.colours(node);
    const lists = colours.map((c) => this.vertices(node, c, ion, charge));
    const vertices: StageVertex[] = [];
    let dropped = 0;
    lists.forEach((list, colour) => {
      dropped += Math.max(0, list.length - this.limits.maxCandidates);
      for (const v of list.slice(0, this.limits.maxCandidates)) vertices.push({ ...v, colour });
    });
    for (const v of vertices) v.edges = this.edges(vertices, v, ion, charge);
    const solution = solveTree(colours.length, vertices, this.limits);
    const below = vertices.every((v) => v.below === 0 || solution.chosen[v.colour] < 0) || solution.proven;
    const score = solution.score + this.precursorScore(node, ion, charge);
    return { ion, charge, score, proven: solution.proven && below, colours, vertices, solution, dropped };
  }

  /** The ions of a stage that need a formula, heaviest first; isolated ones always, others by intensity. */
  private colours(node: StageNode): ColourPeak[] {
    const isolated = new Map<number, StageNode[]>();
    const colours: ColourPeak[] = [];
    for (const child of node.children) {
      const index = isolatedPeak(node, child);
      if (index >= 0) isolated.set(index, [...(isolated.get(index) ?? []), child]);
      else colours.push({ peak: null, target: unseen(child), children: [child] });
    }
    const open = node.peaks
      .map((peak, index) => ({ peak, index }))
      .filter(
        ({ peak, index }) =>
          isolated.has(index) || peak.role === 'product' || (peak.role === 'above-precursor' && node.trap)
      );
    const weight = ({ peak, index }: { peak: StagePeak; index: number }) =>
      isolated.has(index) || peak.confirmed !== null ? Infinity : peak.relative;
    open.sort((a, b) => weight(b) - weight(a) || a.peak.mz - b.peak.mz);
    for (const { peak, index } of open.slice(0, this.limits.maxPeaks)) {
      colours.push({ peak, target: peak, children: isolated.get(index) ?? [] });
    }
    return colours.sort((a, b) => b.target.mz - a.target.mz);
  }

  private vertices(
    node: StageNode,
    { peak, target, children }: ColourPeak,
    ion: IonFormula,
    charge: number
  ): StageVertex[] {
    const found = peakCandidates(this.ions, target, ion, charge, this.sign, node.trap);
    const list = found.map((candidate) => {
      const seen = candidate.score - (peak ? 0 : candidate.terms.intensity) + (target.confirmed ? CONFIRMED : 0);
      const root = this.edgeWeight(ion, charge, ion, candidate);
      return { candidate, below: 0, colour: 0, score: seen, edges: [], rank: seen + root };
    });
    list.sort((a, b) => b.rank - a.rank || a.candidate.ion.key - b.candidate.ion.key);
    const kept = list.slice(0, this.limits.maxCandidates);
    for (const v of kept) {
      for (const child of children) v.below += this.solve(child, v.candidate.ion, v.candidate.charge).score;
      v.score += v.below;
    }
    return [...kept, ...list.slice(this.limits.maxCandidates)];
  }

  private edges(vertices: readonly StageVertex[], v: StageVertex, root: IonFormula, charge: number): TreeEdge[] {
    const edges: TreeEdge[] = [{ from: -1, weight: this.edgeWeight(root, charge, root, v.candidate) }];
    const base = this.baseOf(v.candidate);
    for (let i = 0; i < vertices.length && vertices[i].colour < v.colour; i++) {
      const from = vertices[i].candidate;
      if (from.charge < v.candidate.charge || from.ion.key === v.candidate.ion.key) continue;
      if (!this.ions.contains(from.ion, base)) continue;
      edges.push({ from: i, weight: this.edgeWeight(root, from.charge, from.ion, v.candidate) });
    }
    return edges;
  }

  /** The sub-formula that must lie within the ion it came from: without the water taken up. */
  private baseOf(candidate: PeakCandidate): IonFormula {
    return candidate.water ? this.ions.formula(candidate.ion.key - this.ions.waterKey) : candidate.ion;
  }

  private edgeWeight(root: IonFormula, charge: number, from: IonFormula, to: PeakCandidate): number {
    const loss = from.key - this.baseOf(to).key;
    if (loss === 0) return 0;
    const worth = this.losses.worth(loss);
    return (isOdd(from, charge) ? worth.scoreFromOdd : worth.score) + lossMassTerm(worth.mass, root.mass);
  }

  /** Key of the loss between two ions and its named terms; the loss is empty (key 0) for a bare water adduct. */
  edgeTerms(
    root: IonFormula,
    charge: number,
    from: IonFormula,
    to: PeakCandidate
  ): { loss: number; terms: ScoreTerms } {
    const loss = from.key - this.baseOf(to).key;
    if (loss === 0) return { loss, terms: {} };
    const worth = this.losses.worth(loss);
    const terms: ScoreTerms = { ...worth.terms, 'loss mass': lossMassTerm(worth.mass, root.mass) };
    if (worth.radical && isOdd(from, charge)) terms['radical loss'] = WEIGHTS.radicalBack;
    return { loss, terms };
  }

  /** What the intact precursor in its own spectrum says about its formula. */
  private precursorScore(node: StageNode, ion: IonFormula, charge: number): number {
    const peak = this.precursorPeak(node, ion, charge);
    return peak ? this.precursorTerms(peak, ion, charge)['mass error'] + intensityTerm(peak.relative) : 0;
  }

  precursorTerms(peak: StagePeak, ion: IonFormula, charge: number): ScoreTerms {
    const mz = this.ions.mz(ion, this.sign * charge);
    return { 'mass error': massErrorTerm(peak.mz - mz, peak.sigma), intensity: intensityTerm(peak.relative) };
  }

  /** The strongest peak of the intact precursor within its window. */
  precursorPeak(node: StageNode, ion: IonFormula, charge: number): StagePeak | null {
    const mz = this.ions.mz(ion, this.sign * charge);
    let best: StagePeak | null = null;
    for (const peak of node.peaks) {
      if (peak.role !== 'precursor' || Math.abs(peak.mz - mz) > peak.window) continue;
      if (!best || peak.intensity > best.intensity) best = peak;
    }
    return best;
  }
}

/** Electron parity of an ion of this charge number. */
export function isOdd(ion: IonFormula, charge: number): boolean {
  return Number.isInteger(ion.dbe) === (charge % 2 !== 0);
}

const unseen = (child: StageNode): PeakTarget => ({
  mz: child.mz,
  window: child.window,
  sigma: child.window / WEIGHTS.windowSigmas,
  relative: 0,
  confirmed: null,
  rejected: []
});
