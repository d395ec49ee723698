import { ION_BITS, type ClaimStateName, type IonColumns, type WorkbenchView } from '$lib/schema/workbench';

/** How an ion is drawn: its claim's state, or disputed while a remark on it is unresolved. */
export type MarkState = ClaimStateName | 'disputed';

/** One ion as the components read it. */
export interface IonItem {
  id: number;
  spectrum: number;
  mz: number;
  /** as measured */
  intensity: number;
  /** percent of the base peak of its spectrum */
  relative: number;
  scans: number;
  state: ClaimStateName;
  mark: MarkState;
  formula: string | null;
  charge: number;
  errorPpm: number | null;
  dbe: number | null;
  oddElectron: boolean;
  loss: string | null;
  lossRadical: boolean;
  fromMz: number | null;
  fromFormula: string | null;
  link: 'measured' | 'inferred' | null;
  isPrecursor: boolean;
  flag: string | null;
  score: number | null;
  version: number;
  reason: string | null;
  /** decided by a person */
  decided: boolean;
}

const STATES: Readonly<Record<string, ClaimStateName>> = {
  o: 'open',
  p: 'proposed',
  c: 'confirmed',
  r: 'rejected'
};
export const STATE_LETTER: Readonly<Record<ClaimStateName, string>> = {
  open: 'o',
  proposed: 'p',
  confirmed: 'c',
  rejected: 'r'
};

function baseIntensities(ions: IonColumns): Map<number, number> {
  const base = new Map<number, number>();
  ions.spectrum.forEach((spectrum, i) => {
    if (ions.intensity[i] > (base.get(spectrum) ?? 0)) base.set(spectrum, ions.intensity[i]);
  });
  return base;
}

/** Unpacks the columns of a view to items, in their order (by spectrum, then m/z). */
export function ionItems({ ions, remarks }: Pick<WorkbenchView, 'ions' | 'remarks'>): IonItem[] {
  const base = baseIntensities(ions);
  const text = (index: number) => (index < 0 ? null : ions.strings[index]);
  return ions.id.map((id, i) => {
    const bits = ions.bits[i];
    const state = STATES[ions.state[i]];
    return {
      id,
      spectrum: ions.spectrum[i],
      mz: ions.mz[i],
      intensity: ions.intensity[i],
      relative: (100 * ions.intensity[i]) / (base.get(ions.spectrum[i]) || 1),
      scans: ions.scans[i],
      state,
      mark: remarks.ions[id] ? 'disputed' : state,
      formula: text(ions.formula[i]),
      charge: ions.charge[i],
      errorPpm: ions.errorPpm[i],
      dbe: ions.dbe[i],
      oddElectron: (bits & ION_BITS.oddElectron) > 0,
      loss: text(ions.loss[i]),
      lossRadical: (bits & ION_BITS.lossRadical) > 0,
      fromMz: ions.fromMz[i],
      fromFormula: text(ions.fromFormula[i]),
      link: bits & ION_BITS.measured ? 'measured' : bits & ION_BITS.inferred ? 'inferred' : null,
      isPrecursor: (bits & ION_BITS.precursor) > 0,
      flag: text(ions.flag[i]),
      score: ions.score[i],
      version: ions.version[i],
      reason: ions.reasons[id] ?? null,
      decided: (bits & ION_BITS.decided) > 0
    };
  });
}

/** Groups by spectrum index; each group keeps the order by m/z. */
export function bySpectrum(items: readonly IonItem[]): Map<number, IonItem[]> {
  const groups = new Map<number, IonItem[]>();
  for (const item of items) {
    const group = groups.get(item.spectrum);
    if (group) group.push(item);
    else groups.set(item.spectrum, [item]);
  }
  return groups;
}

/** Decimals of an m/z that the analyser can mean: traps and quadrupoles are read at unit resolution. */
export const mzDecimals = (analyser: string): number => (analyser === 'ion-trap' || analyser === 'quadrupole' ? 1 : 4);
