import type { IonConstraint } from '$lib/core/model';
import type { ions } from '../db/schema';

type IonRow = typeof ions.$inferSelect;

/** Whether a person decided on the ion: confirmed, rejected, or left it open on purpose. */
export const isDecided = (ion: Pick<IonRow, 'state' | 'decidedAt'>): boolean =>
  ion.state === 'confirmed' || ion.state === 'rejected' || ion.decidedAt !== null;

/** Decisions of people as constraints of the next suggestion. */
export function constraintsOf(rows: Pick<IonRow, 'state' | 'spectrum' | 'mz' | 'formula'>[]): IonConstraint[] {
  return rows.flatMap(({ state, spectrum, mz, formula }) =>
    (state === 'confirmed' && formula) || state === 'rejected'
      ? [{ spectrum, mz, kind: state as 'confirmed' | 'rejected', formula }]
      : []
  );
}
