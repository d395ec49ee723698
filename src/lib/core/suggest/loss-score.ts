import { naturalLog } from './logarithm';
import { commonLoss, isImplausibleLoss } from '../chem';
import { type ScoreTerms } from '../model';
import { type IonSpace } from './ion-space';
import { WEIGHTS } from './weights';

/** What a loss is worth, whichever ions it joins. */
export interface LossWorth {
  mass: number;
  radical: boolean;
  terms: ScoreTerms;
  score: number;
  /** the same from an odd-electron ion, which a radical loss turns even-electron again. */
  scoreFromOdd: number;
}

/** Scores losses by key, each computed once. */
export class LossScorer {
  private readonly known = new Map<number, LossWorth>();

  constructor(private readonly ions: IonSpace) {}

  /** Worth of the loss of this key (difference of two ion keys, the second a sub-formula of the first). */
  worth(key: number): LossWorth {
    let worth = this.known.get(key);
    if (!worth) this.known.set(key, (worth = this.judge(key)));
    return worth;
  }

  private judge(key: number): LossWorth {
    const { mass, dbe } = this.ions.formula(key);
    const radical = !Number.isInteger(dbe);
    const terms: ScoreTerms = {};
    const common = commonLoss(this.ions.text(key));
    if (common && !common.radical) {
      terms['common loss'] = { listed: WEIGHTS.lossListed, seen: WEIGHTS.lossSeen, practice: WEIGHTS.lossPractice }[
        common.evidence
      ];
    } else if (isImplausibleLoss(this.ions.composition(key))) {
      terms['implausible loss'] = WEIGHTS.lossImplausible;
    }
    if (radical) terms['radical loss'] = common ? WEIGHTS.radicalListed : WEIGHTS.radicalOther;
    if (dbe < 0) terms['saturated loss'] = dbe * 1;
    const score = Object.values(terms).reduce((a, b) => a + b, 0);
    const scoreFromOdd = radical ? score - terms['radical loss'] + WEIGHTS.radicalBack : score;
    return { mass, radical, terms, score, scoreFromOdd };
  }
}

/** Reward reduction for large losses, log(1 − m(loss)/m(root)) (Bioinformatics 24, i49, 2008). */
export function lossMassTerm(lossMass: number, rootMass: number): number {
  return naturalLog(Math.max(0.02, 1 - lossMass / rootMass));
}
