import { eq, sql } from 'drizzle-orm';
import { isDeepStrictEqual } from 'node:util';
import type { AnnotatedIon, Suggestion } from '$lib/core/model';
import type { Executor } from '../db/connection';
import { ions } from '../db/schema';
import { isDecided } from './decided-ions';

type IonRow = typeof ions.$inferSelect;

const MAX_ALTERNATIVES = 12;
const BATCH = 400;

type Proposal = Pick<
  IonRow,
  | 'state'
  | 'formula'
  | 'charge'
  | 'errorPpm'
  | 'dbe'
  | 'oddElectron'
  | 'fromMz'
  | 'fromFormula'
  | 'loss'
  | 'lossRadical'
  | 'link'
  | 'isPrecursor'
  | 'flag'
  | 'score'
  | 'terms'
>;

const proposalOf = (ion: AnnotatedIon): Proposal => ({
  state: ion.formula === null ? 'open' : 'proposed',
  formula: ion.formula,
  charge: ion.charge,
  errorPpm: ion.errorPpm,
  dbe: ion.dbe,
  oddElectron: ion.oddElectron,
  fromMz: ion.fromMz,
  fromFormula: ion.fromFormula,
  loss: ion.loss,
  lossRadical: ion.lossRadical,
  link: ion.link,
  isPrecursor: ion.isPrecursor,
  flag: ion.remark,
  score: ion.score,
  terms: ion.terms
});

/** The row after a suggestion; null when nothing of it changes. A decided claim only gets fresh alternatives. */
export function mergedIon(row: IonRow, ion: AnnotatedIon): IonRow | null {
  const alternatives = ion.alternatives.slice(0, MAX_ALTERNATIVES);
  const proposal = isDecided(row) ? null : proposalOf(ion);
  const merged: IonRow = { ...row, ...proposal, alternatives };
  if (isDeepStrictEqual(merged, row)) return null;
  const claimChanged = proposal !== null && (merged.state !== row.state || merged.formula !== row.formula);
  return { ...merged, version: row.version + (claimChanged ? 1 : 0) };
}

const CHANGED = [
  'state',
  'formula',
  'charge',
  'errorPpm',
  'dbe',
  'oddElectron',
  'fromMz',
  'fromFormula',
  'loss',
  'lossRadical',
  'link',
  'isPrecursor',
  'flag',
  'score',
  'terms',
  'alternatives',
  'version'
] as const satisfies (keyof IonRow)[];

/** Writes the proposals of a suggestion to the ions of a tree, under the locks of the caller's transaction. */
export async function writeProposals(tx: Executor, treeId: string, suggestion: Suggestion): Promise<void> {
  const rows = await tx.select().from(ions).where(eq(ions.treeId, treeId)).for('update');
  const changed = rows.flatMap((row) => {
    const ion = suggestion.spectra[row.spectrum]?.[row.position];
    return (ion && mergedIon(row, ion)) ?? [];
  });
  const set = Object.fromEntries(CHANGED.map((name) => [name, sql.raw(`values(\`${ions[name].name}\`)`)]));
  for (let i = 0; i < changed.length; i += BATCH)
    await tx
      .insert(ions)
      .values(changed.slice(i, i + BATCH))
      .onDuplicateKeyUpdate({ set });
}
