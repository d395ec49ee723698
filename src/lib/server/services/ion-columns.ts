import { asc, eq } from 'drizzle-orm';
import { ION_BITS, type IonColumns } from '$lib/schema/workbench';
import type { Executor } from '../db/connection';
import { ions } from '../db/schema';

const LETTER = { open: 'o', proposed: 'p', confirmed: 'c', rejected: 'r' } as const;

/** Shares equal texts: a tree of thousands of ions names a few hundred formulas and losses. */
function makeStrings() {
  const strings: string[] = [];
  const known = new Map<string, number>();
  const indexOf = (text: string | null): number => {
    if (text === null) return -1;
    let at = known.get(text);
    if (at === undefined) {
      at = strings.push(text) - 1;
      known.set(text, at);
    }
    return at;
  };
  return { strings, indexOf };
}

/** m/z to a millionth and errors to a thousandth of a ppm: beyond any measurement, and half the bytes. */
const micro = (mz: number) => Math.round(mz * 1e6) / 1e6;
const milli = (value: number | null) => (value === null ? null : Math.round(value * 1e3) / 1e3);

const fields = {
  id: ions.id,
  spectrum: ions.spectrum,
  mz: ions.mz,
  intensity: ions.intensity,
  scans: ions.scanCount,
  state: ions.state,
  formula: ions.formula,
  charge: ions.charge,
  errorPpm: ions.errorPpm,
  dbe: ions.dbe,
  oddElectron: ions.oddElectron,
  loss: ions.loss,
  lossRadical: ions.lossRadical,
  fromMz: ions.fromMz,
  fromFormula: ions.fromFormula,
  link: ions.link,
  isPrecursor: ions.isPrecursor,
  flag: ions.flag,
  score: ions.score,
  version: ions.version,
  reason: ions.reason,
  decidedBy: ions.decidedBy
};

/** All ions of the tree as columns, ordered by spectrum and m/z. */
export async function ionColumns(tx: Executor, treeId: string): Promise<IonColumns> {
  const rows = await tx
    .select(fields)
    .from(ions)
    .where(eq(ions.treeId, treeId))
    .orderBy(asc(ions.spectrum), asc(ions.position));
  const { strings, indexOf } = makeStrings();
  const reasons: Record<number, string> = {};
  for (const row of rows) if (row.reason) reasons[row.id] = row.reason;
  return {
    id: rows.map((r) => r.id),
    spectrum: rows.map((r) => r.spectrum),
    mz: rows.map((r) => micro(r.mz)),
    intensity: rows.map((r) => r.intensity),
    scans: rows.map((r) => r.scans),
    state: rows.map((r) => LETTER[r.state]).join(''),
    formula: rows.map((r) => indexOf(r.formula)),
    charge: rows.map((r) => r.charge),
    errorPpm: rows.map((r) => milli(r.errorPpm)),
    dbe: rows.map((r) => r.dbe),
    loss: rows.map((r) => indexOf(r.loss)),
    fromMz: rows.map((r) => (r.fromMz === null ? null : micro(r.fromMz))),
    fromFormula: rows.map((r) => indexOf(r.fromFormula)),
    bits: rows.map(
      (r) =>
        (r.lossRadical ? ION_BITS.lossRadical : 0) |
        (r.link === 'measured' ? ION_BITS.measured : 0) |
        (r.link === 'inferred' ? ION_BITS.inferred : 0) |
        (r.isPrecursor ? ION_BITS.precursor : 0) |
        (r.oddElectron ? ION_BITS.oddElectron : 0) |
        (r.decidedBy ? ION_BITS.decided : 0)
    ),
    flag: rows.map((r) => indexOf(r.flag)),
    score: rows.map((r) => milli(r.score)),
    version: rows.map((r) => r.version),
    reasons,
    strings
  };
}
