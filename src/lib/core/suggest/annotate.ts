import { type AnnotatedIon, type AssembledTree, type IonAlternative, type ScoreTerms } from '../model';
import { type IonFormula, type IonSpace } from './ion-space';
import { sumTerms, type PeakCandidate } from './peak-candidates';
import { isOdd, type StageResult, type StageSolver, type StageVertex } from './stage-solver';
import { type StageNode, type StagePeak } from './stages';
import { WEIGHTS } from './weights';

/** A chosen parent of a candidate: the isolated ion (vertex null) or another chosen ion of the same stage. */
interface Attachment {
  mz: number;
  ion: IonFormula;
  charge: number;
  measured: boolean;
  loss: number;
  terms: ScoreTerms;
}

/** An ion without a proposal. */
export function openIon(mz: number, intensity: number, charge: number, remark: AnnotatedIon['remark']): AnnotatedIon {
  return {
    mz,
    intensity,
    formula: null,
    charge,
    errorPpm: null,
    dbe: null,
    oddElectron: null,
    fromMz: null,
    fromFormula: null,
    loss: null,
    lossRadical: false,
    link: null,
    isPrecursor: false,
    remark,
    score: null,
    terms: {},
    alternatives: []
  };
}

/** Log odds below which a formula of an ion as weak as noise is no more than a chance hit. */
const CHANCE_HIT = -2;

/** Whether loss and composition speak for a formula when its mass error is judged as between molecules, unsharpened. */
function isPlausible(ion: AnnotatedIon): boolean {
  const sharpened = ion.terms['mass error'] ?? 0;
  return (ion.score ?? -Infinity) - sharpened * (1 - 1 / WEIGHTS.massEmphasis ** 2) > CHANCE_HIT;
}

/** An ion that keeps what could be proposed but is not. */
const leftOpen = (ion: AnnotatedIon): AnnotatedIon => ({
  ...openIon(ion.mz, ion.intensity, ion.charge, ion.remark ?? 'noise'),
  alternatives: ion.alternatives
});

/** Fewer unexplained peaks than this tell nothing of the noise. */
const FEWEST_NOISE_PEAKS = 8;
const NOISE_QUANTILE = 0.9;
/** Noise has a long tail: this many times the quantile it still reaches. */
const NOISE_REACH = 2;

/** A peak, and whether any sub-formula of the isolated ion fits it. */
type Explained = Pick<StagePeak, 'spectrum' | 'intensity'> & { explained: boolean };

/**
 * How strong noise is in each spectrum, told by the peaks that no sub-formula fits. Where most peaks of that strength
 * have a formula, the unexplained ones are no measure, and no level is given.
 * @returns intensity by spectrum
 */
export function noiseLevels(peaks: readonly Explained[]): Map<number, number> {
  const levels = new Map<number, number>();
  for (const spectrum of new Set(peaks.map((peak) => peak.spectrum))) {
    const own = peaks.filter((peak) => peak.spectrum === spectrum);
    const noise = own.filter((peak) => !peak.explained).map((peak) => peak.intensity);
    if (noise.length < FEWEST_NOISE_PEAKS) continue;
    noise.sort((a, b) => a - b);
    const level = NOISE_REACH * noise[Math.floor(NOISE_QUANTILE * (noise.length - 1))];
    const fitting = own.filter((peak) => peak.explained && peak.intensity <= level).length;
    if (fitting <= noise.length) levels.set(spectrum, level);
  }
  return levels;
}

/** Every ion of every spectrum without a formula, for trees whose precursor formula is unknown. */
export function openIons(tree: AssembledTree): AnnotatedIon[][] {
  return tree.spectra.map((s) => Array.from(s.peaks.mz, (mz, i) => openIon(mz, s.peaks.intensity[i], 1, null)));
}

/** Writes the best trees of all stages as annotated ions, with every alternative and its terms. */
export class Annotator {
  readonly spectra: AnnotatedIon[][];
  /** isolated ions whose best and second-best formula score nearly alike. */
  readonly ambiguous: string[] = [];

  constructor(
    tree: AssembledTree,
    private readonly ions: IonSpace,
    private readonly solver: StageSolver,
    private readonly sign: 1 | -1
  ) {
    this.spectra = openIons(tree);
  }

  /** Annotates a stage under its ion's formula, then the stages below. */
  stage(node: StageNode, ion: IonFormula, charge: number): void {
    const result = this.solver.solve(node, ion, charge);
    for (const peak of node.peaks) {
      this.put(
        peak,
        openIon(
          peak.mz,
          peak.intensity,
          1,
          peak.role === 'isotope' || peak.role === 'above-precursor' ? peak.role : null
        )
      );
    }
    const precursor = this.solver.precursorPeak(node, ion, charge);
    for (const peak of node.peaks) {
      if (peak.role === 'precursor') this.put(peak, this.precursorIon(peak, ion, charge, peak === precursor));
    }
    const ownOf = result.colours.map((_, c) => result.vertices.filter((v) => v.colour === c));
    const noise = noiseLevels(
      result.colours.flatMap(({ peak }, c) => (peak ? [{ ...peak, explained: ownOf[c].length > 0 }] : []))
    );
    result.colours.forEach((colour, c) => {
      const own = ownOf[c];
      const chosen = result.solution.chosen[c] < 0 ? null : result.vertices[result.solution.chosen[c]];
      if (colour.peak) {
        const ion = this.productIon(node, result, colour.peak, own, chosen);
        const { peak } = colour;
        const weak = !peak.confirmed && peak.intensity <= (noise.get(peak.spectrum) ?? 0);
        this.put(peak, weak && !isPlausible(ion) ? leftOpen(ion) : ion);
      }
      const winner = chosen ?? this.bestOf(node, result, own);
      for (const child of colour.children) this.below(child, winner);
    });
  }

  private below(child: StageNode, winner: StageVertex | null): void {
    if (winner) return this.stage(child, winner.candidate.ion, winner.candidate.charge);
    for (const peak of child.peaks) this.put(peak, openIon(peak.mz, peak.intensity, 1, null));
    for (const next of child.children) this.below(next, null);
  }

  private put(peak: StagePeak, ion: AnnotatedIon): void {
    this.spectra[peak.spectrum][peak.index] = ion;
  }

  private precursorIon(peak: StagePeak, ion: IonFormula, charge: number, chosen: boolean): AnnotatedIon {
    const mz = this.ions.mz(ion, this.sign * charge);
    const open = openIon(peak.mz, peak.intensity, charge, null);
    if (!chosen && Math.abs(peak.mz - mz) > peak.window) return open;
    const terms = this.solver.precursorTerms(peak, ion, charge);
    const facts = {
      formula: this.ions.text(ion.key),
      errorPpm: ((peak.mz - mz) / mz) * 1e6,
      dbe: ion.dbe,
      oddElectron: isOdd(ion, charge),
      loss: null,
      score: sumTerms(terms),
      terms
    };
    return { ...open, ...facts, isPrecursor: true, alternatives: [facts] };
  }

  private productIon(
    node: StageNode,
    result: StageResult,
    peak: StagePeak,
    own: StageVertex[],
    chosen: StageVertex | null
  ): AnnotatedIon {
    const rated = own.map((vertex) => {
      const from = this.attach(node, result, vertex);
      const terms: ScoreTerms = { ...vertex.candidate.terms, ...from.terms };
      if (vertex.below !== 0) terms['stages below'] = vertex.below;
      return { vertex, from, terms, score: sumTerms(terms) };
    });
    const first = (r: { vertex: StageVertex }) => (r.vertex === chosen ? 1 : 0);
    rated.sort(
      (a, b) => first(b) - first(a) || b.score - a.score || a.vertex.candidate.ion.key - b.vertex.candidate.ion.key
    );
    const alternatives = rated.map((r) => this.alternative(r.vertex.candidate, r.from, r.terms));
    // An ion that the tree leaves out still gets its best candidate, at the score that says why it was left out.
    const best = rated[0];
    const open = openIon(
      peak.mz,
      peak.intensity,
      best?.vertex.candidate.charge ?? 1,
      peak.role === 'above-precursor' ? peak.role : null
    );
    if (!best) return open;
    return {
      ...open,
      ...alternatives[0],
      fromMz: best.from.mz,
      fromFormula: this.ions.text(best.from.ion.key),
      lossRadical: best.from.loss > 0 && !Number.isInteger(this.ions.formula(best.from.loss).dbe),
      link: best.from.measured ? 'measured' : 'inferred',
      alternatives
    };
  }

  private alternative(candidate: PeakCandidate, from: Attachment, terms: ScoreTerms): IonAlternative {
    return {
      formula: this.ions.text(candidate.ion.key),
      errorPpm: candidate.errorPpm,
      dbe: candidate.ion.dbe,
      oddElectron: isOdd(candidate.ion, candidate.charge),
      loss: from.loss > 0 ? this.ions.text(from.loss) : null,
      score: sumTerms(terms),
      terms
    };
  }

  private bestOf(node: StageNode, result: StageResult, own: StageVertex[]): StageVertex | null {
    let best: StageVertex | null = null;
    let most = -Infinity;
    for (const vertex of own) {
      const score = vertex.score + sumTerms(this.attach(node, result, vertex).terms);
      if (score > most) [best, most] = [vertex, score];
    }
    return best;
  }

  /** The best of the isolated ion and the chosen ions of the stage as the origin of a candidate. */
  private attach(node: StageNode, result: StageResult, vertex: StageVertex): Attachment {
    const from = (ion: IonFormula, charge: number, mz: number, measured: boolean): Attachment => {
      const { loss, terms } = this.solver.edgeTerms(result.ion, charge, ion, vertex.candidate);
      // What was lost before water was taken up is no difference of the two ions, so it is not called their loss.
      return { loss: vertex.candidate.water ? 0 : loss, terms, mz, ion, charge, measured };
    };
    let best = from(result.ion, result.charge, node.mz, true);
    let most = sumTerms(best.terms);
    for (const { from: index, weight } of vertex.edges) {
      if (index < 0 || weight <= most) continue;
      const parent = result.vertices[index];
      if (result.solution.chosen[parent.colour] !== index) continue;
      const { ion, charge } = parent.candidate;
      best = from(ion, charge, result.colours[parent.colour].target.mz, false);
      most = weight;
    }
    return best;
  }
}
