import type { IonItem, MarkState } from '$lib/state/ion-rows';

export type SortKey = 'mz' | 'formula' | 'error' | 'loss' | 'intensity' | 'state' | 'spectrum';

export interface IonFilter {
  /** null: every state */
  state: MarkState | null;
  /** part of a formula or a loss, case as written */
  text: string;
  from: number | null;
  to: number | null;
}

export const NO_FILTER: IonFilter = { state: null, text: '', from: null, to: null };

export const isFiltering = (f: IonFilter): boolean =>
  f.state !== null || f.text.trim() !== '' || f.from !== null || f.to !== null;

/** The ions that pass: state, m/z within [from, to], formula or loss holding the text, or m/z starting with it. */
export function filterIons(items: readonly IonItem[], filter: IonFilter): IonItem[] {
  const text = filter.text.trim();
  return items.filter(
    (ion) =>
      (filter.state === null || ion.mark === filter.state || ion.state === filter.state) &&
      (filter.from === null || ion.mz >= filter.from) &&
      (filter.to === null || ion.mz <= filter.to) &&
      (text === '' ||
        (ion.formula?.includes(text) ?? false) ||
        (ion.loss?.includes(text) ?? false) ||
        ion.mz.toFixed(4).startsWith(text))
  );
}

const STATE_RANK: Readonly<Record<MarkState, number>> = {
  disputed: 0,
  proposed: 1,
  open: 2,
  confirmed: 3,
  rejected: 4
};
const last = (value: number | null) => (value === null ? Infinity : value);
const textOrder = (a: string | null, b: string | null) =>
  a === b ? 0 : a === null ? 1 : b === null ? -1 : a < b ? -1 : 1;

const ORDER: Readonly<Record<SortKey, (a: IonItem, b: IonItem) => number>> = {
  mz: (a, b) => a.mz - b.mz,
  formula: (a, b) => textOrder(a.formula, b.formula),
  error: (a, b) => last(a.errorPpm) - last(b.errorPpm),
  loss: (a, b) => textOrder(a.loss, b.loss),
  intensity: (a, b) => a.relative - b.relative,
  state: (a, b) => STATE_RANK[a.mark] - STATE_RANK[b.mark],
  spectrum: (a, b) => a.spectrum - b.spectrum
};

/** A sorted copy; ions without the value come last whichever the direction, ties by descending m/z. */
export function sortIons(items: readonly IonItem[], key: SortKey, descending: boolean): IonItem[] {
  const missing = (ion: IonItem) =>
    (key === 'formula' && ion.formula === null) ||
    (key === 'loss' && ion.loss === null) ||
    (key === 'error' && ion.errorPpm === null);
  const order = ORDER[key];
  return [...items].sort(
    (a, b) =>
      Number(missing(a)) - Number(missing(b)) ||
      (missing(a) ? 0 : (descending ? -1 : 1) * order(a, b)) ||
      b.mz - a.mz ||
      a.id - b.id
  );
}
