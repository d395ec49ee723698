import type { ClaimStateName, HistoryEntry, IonAfter } from '$lib/schema/workbench';
import type { claimHistory, ions } from '../db/schema';
import type { ClaimState } from '../db/schema/trees';

export type IonRow = typeof ions.$inferSelect;
export type HistoryRow = Pick<
  typeof claimHistory.$inferSelect,
  'action' | 'before' | 'after' | 'actorId' | 'createdAt'
>;

/** The part of an ion that decisions change, as history keeps it. */
export const claimStateOf = (ion: IonRow): ClaimState => ({
  state: ion.state,
  formula: ion.formula,
  errorPpm: ion.errorPpm,
  dbe: ion.dbe,
  oddElectron: ion.oddElectron,
  loss: ion.loss,
  lossRadical: ion.lossRadical,
  fromMz: ion.fromMz,
  fromFormula: ion.fromFormula,
  link: ion.link,
  score: ion.score,
  terms: ion.terms,
  reason: ion.reason
});

/** What the client needs of an ion after a decision. */
export const ionAfter = (ion: IonRow): IonAfter => {
  const { terms: _terms, ...claim } = claimStateOf(ion);
  return { id: ion.id, version: ion.version, ...claim, decided: ion.decidedBy !== null };
};

/** A claim without a formula: what remains when a person leaves an ion open. */
export const openClaim = (reason: string | null): ClaimState => ({
  state: 'open' satisfies ClaimStateName,
  formula: null,
  errorPpm: null,
  dbe: null,
  oddElectron: null,
  loss: null,
  lossRadical: false,
  fromMz: null,
  fromFormula: null,
  link: null,
  score: null,
  terms: {},
  reason
});

/**
 * Finds the decision that an undo takes back, and the one that then stands.
 * @param rows the ion's history, newest first; each 'undone' row cancels the newest decision before it
 * @returns null when no person's decision is left to take back (the program's own proposals are not undone)
 */
export function undoTarget<T extends { action: HistoryEntry['action'] }>(
  rows: readonly T[]
): { target: T; prior: T | null } | null {
  const standing: T[] = [];
  let cancelled = 0;
  for (const row of rows) {
    if (row.action === 'undone') cancelled++;
    else if (cancelled > 0) cancelled--;
    else standing.push(row);
    if (standing.length === 2) break;
  }
  const [target, prior] = standing;
  if (!target || target.action === 'proposed') return null;
  return { target, prior: prior ?? null };
}
