import { randomUUID } from 'node:crypto';
import { eq } from 'drizzle-orm';
import { dbe, ionMz, parseFormula } from '$lib/core/chem';
import { database } from '$lib/server/db';
import { ions, runs, trees, treeSpectra } from '$lib/server/db/schema';

/** A run row without a file behind it. */
async function makeRun(studyId: string): Promise<string> {
  const id = randomUUID();
  await database()
    .insert(runs)
    .values({
      ...{ id, studyId, fileName: 'caffeine.mzML', storageKey: `runs/${id}`, bytes: 1, state: 'ready' as const },
      ...{ sha1: '0'.repeat(40), sha256: id.replaceAll('-', '').repeat(2) }
    });
  return id;
}

type NewIon = typeof ions.$inferInsert;

/** One ion as the program proposes it; without a formula it is open. */
function ionRow(
  treeId: string,
  spectrum: number,
  position: number,
  formula: string | null,
  over: Partial<NewIon>
): NewIon {
  const ion = formula ? parseFormula(formula) : null;
  return {
    ...{ treeId, spectrum, position, mz: ion ? ionMz(ion, 1) : 100.5, intensity: 100, scanCount: 2, charge: 1 },
    ...{ state: formula ? ('proposed' as const) : ('open' as const), formula, errorPpm: ion ? 0 : null },
    ...{ dbe: ion ? dbe(ion) : null, oddElectron: ion ? false : null, score: ion ? 3 : null },
    ...{ terms: ion ? { 'mass error': 3 } : {}, alternatives: [] },
    ...over
  };
}

/**
 * A tree of protonated caffeine, C8H11N4O2+: MS2 with the precursor ion, C6H8N3O+ (loss of C2H3NO) and C5H8N3+ hanging on
 * it (loss of CO), an unassigned peak; MS3 of C6H8N3O+ with C5H8N3+.
 * @returns ids of tree and ions, in that order
 */
export async function makeCaffeineTree(studyId: string) {
  const treeId = randomUUID();
  const [whole, middle] = [ionMz(parseFormula('C8H11N4O2'), 1), ionMz(parseFormula('C6H8N3O'), 1)];
  await database()
    .insert(trees)
    .values({
      ...{ id: treeId, studyId, runId: await makeRun(studyId), name: 'Caffeine', precursorMz: whole, charge: 1 },
      ...{ polarity: 'positive' as const, adduct: '[M+H]+', formula: 'C8H10N4O2', candidates: [], notes: [] },
      settings: { elements: null, adducts: [], tolerance: null, separateEnergies: false },
      updatedAt: new Date()
    });
  const spectrum = (index: number, path: number[], parent: number | null) => ({
    ...{ id: randomUUID(), treeId, index, level: path.length + 1, path, parent, analyser: 'orbitrap' },
    ...{ linkedBy: parent === null ? ('none' as const) : ('reference' as const), isolation: null },
    ...{ scanIds: [`scan=${index}1`, `scan=${index}2`], activations: ['HCD'], energies: [30], energyUnit: 'eV' }
  });
  await database()
    .insert(treeSpectra)
    .values([spectrum(0, [whole], null), spectrum(1, [whole, middle], 0)]);
  const onWhole = { fromMz: whole, fromFormula: 'C8H11N4O2', loss: 'C2H3NO', link: 'measured' as const };
  const onMiddle = { fromMz: middle, fromFormula: 'C6H8N3O', loss: 'CO' };
  await database()
    .insert(ions)
    .values([
      ionRow(treeId, 0, 0, 'C8H11N4O2', { isPrecursor: true, intensity: 500 }),
      ionRow(treeId, 0, 1, 'C6H8N3O', { ...onWhole, intensity: 300 }),
      ionRow(treeId, 0, 2, 'C5H8N3', { ...onMiddle, link: 'inferred', intensity: 60 }),
      ionRow(treeId, 0, 3, null, { mz: 83.0604, intensity: 40 }),
      ionRow(treeId, 1, 0, 'C5H8N3', { ...onMiddle, link: 'measured', intensity: 100 })
    ]);
  const rows = await database().select().from(ions).where(eq(ions.treeId, treeId)).orderBy(ions.id);
  const [precursor, big, small, unknown, stage3] = rows.map((row) => row.id);
  return { treeId, precursor, big, small, unknown, stage3 };
}

/** The ion as it is now. */
export async function ionNow(id: number) {
  const [row] = await database().select().from(ions).where(eq(ions.id, id));
  return row;
}

export async function treeNow(id: string) {
  const [row] = await database().select().from(trees).where(eq(trees.id, id));
  return row;
}
