import { nucleiMass } from '../chem';
import { forEachFormula } from '../formula/solve';
import { type IonSpace } from './ion-space';
import { type LossScorer } from './loss-score';
import { chanceTerm, compositionTerms, intensityTerm, massErrorTerm, sumTerms } from './peak-candidates';
import { type PrecursorCandidate } from './precursors';
import { type StagePeak } from './stages';

/** Formulas of one peak (or of its loss from the precursor) under any precursor, best first, as parallel arrays. */
interface PeakList {
  kind: 'fragment' | 'loss';
  w0: Int32Array;
  w1: Int32Array;
  w2: Int32Array;
  /** mass in u, of the fragment or the loss. */
  mass: Float64Array;
  score: Float64Array;
  target: number;
  reach: number;
  sigma: number;
  gain: number;
}

/**
 * Ranks many precursor candidates quickly: each peak of the MS2 spectrum gives the best of its formulas that is a
 * sub-formula of the candidate. Every peak's formulas are enumerated once, for heavy peaks as the (few) possible
 * losses; the test for a candidate is then integer arithmetic.
 */
export class Prefilter {
  private readonly lists: PeakList[];

  constructor(
    private readonly ions: IonSpace,
    losses: LossScorer,
    peaks: readonly StagePeak[],
    precursorMz: number,
    precursorWindow: number,
    sign: 1 | -1
  ) {
    const precursorMass = nucleiMass(precursorMz, sign);
    this.lists = peaks.map((peak) => {
      const mass = nucleiMass(peak.mz, sign);
      return mass > precursorMass / 2
        ? this.lossList(peak, precursorMass - mass, mass, precursorWindow, losses)
        : this.fragmentList(peak, mass);
    });
  }

  /** Sum over the peaks of their best explanation under a candidate. */
  score(candidate: PrecursorCandidate): number {
    let sum = 0;
    for (const list of this.lists) sum += Math.max(0, this.best(list, candidate));
    return sum;
  }

  private best(list: PeakList, { ion }: PrecursorCandidate): number {
    const [g0, g1, g2] = this.ions.guards;
    const p0 = ion.w0 | g0;
    const p1 = ion.w1 | g1;
    const p2 = ion.w2 | g2;
    const { w0, w1, w2, score } = list;
    let best = -Infinity;
    let fitting = 0;
    for (let i = 0; i < score.length; i++) {
      if (((p0 - w0[i]) & g0) !== g0 || ((p1 - w1[i]) & g1) !== g1 || ((p2 - w2[i]) & g2) !== g2) continue;
      let own = score[i];
      if (list.kind === 'loss') {
        const deviation = list.target - (ion.mass - list.mass[i]);
        if (Math.abs(deviation) > list.reach) continue;
        own += massErrorTerm(deviation, list.sigma);
      }
      fitting++;
      if (own > best) best = own;
    }
    return best + list.gain + chanceTerm(fitting);
  }

  private fragmentList(peak: StagePeak, mass: number): PeakList {
    const found: Entry[] = [];
    forEachFormula(this.ions.space, mass - peak.window, mass + peak.window, (counts, calculated) => {
      const dbe = this.ions.dbe(counts);
      if (dbe < -0.5) return;
      const [w0, w1, w2] = this.ions.pack(counts);
      const own = sumTerms(compositionTerms({ key: 0, counts: Uint16Array.from(counts), w0, w1, w2, mass, dbe }));
      found.push({ w0, w1, w2, mass: calculated, score: own + massErrorTerm(mass - calculated, peak.sigma) });
    });
    return toList('fragment', found, peak, mass);
  }

  private lossList(peak: StagePeak, loss: number, mass: number, window: number, losses: LossScorer): PeakList {
    const found: Entry[] = [];
    const reach = peak.window + window;
    forEachFormula(this.ions.space, loss - reach, loss + reach, (counts, calculated) => {
      const [w0, w1, w2] = this.ions.pack(counts);
      found.push({ w0, w1, w2, mass: calculated, score: losses.worth(this.ions.key(counts)).score });
    });
    return toList('loss', found, peak, mass);
  }
}

interface Entry {
  w0: number;
  w1: number;
  w2: number;
  mass: number;
  score: number;
}

function toList(kind: PeakList['kind'], found: Entry[], peak: StagePeak, target: number): PeakList {
  found.sort((a, b) => b.score - a.score || a.mass - b.mass);
  return {
    kind,
    w0: Int32Array.from(found, (f) => f.w0),
    w1: Int32Array.from(found, (f) => f.w1),
    w2: Int32Array.from(found, (f) => f.w2),
    mass: Float64Array.from(found, (f) => f.mass),
    score: Float64Array.from(found, (f) => f.score),
    target,
    reach: peak.window,
    sigma: peak.sigma,
    gain: intensityTerm(peak.relative)
  };
}
