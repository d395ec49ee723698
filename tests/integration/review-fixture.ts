import { randomUUID } from 'node:crypto';
import { and, eq } from 'drizzle-orm';
import { ionMz, parseFormula } from '$lib/core/chem';
import type { AssembledTree, TreeSpectrum } from '$lib/core/model';
import { database } from '$lib/server/db';
import { groups, ions, runs, studyGuests, trees } from '$lib/server/db/schema';
import { updateExplained } from '$lib/server/services/explained';
import { insertTree } from '$lib/server/services/tree-rows';
import { makeGroup, makePerson, makeStudy, type TestPerson } from '../helpers/people';

// Caffeine, C8H10N4O2, protonated: its well-known losses of C2H3NO and CO; calculated from AME2020 masses by the core.
const CLAIMS = [
  { spectrum: 0, position: 2, formula: 'C8H11N4O2', from: null, loss: null, state: 'confirmed' },
  { spectrum: 0, position: 1, formula: 'C6H8N3O', from: 'C8H11N4O2', loss: 'C2H3NO', state: 'confirmed' },
  { spectrum: 1, position: 1, formula: 'C6H8N3O', from: null, loss: null, state: 'proposed' },
  { spectrum: 1, position: 0, formula: 'C5H8N3', from: 'C6H8N3O', loss: 'CO', state: 'proposed' }
] as const;
const mzOf = (formula: string): number => ionMz(parseFormula(formula), 1);

function spectrum(index: number, mz: number[], intensity: number[], change: Partial<TreeSpectrum>): TreeSpectrum {
  return {
    ...{ index, level: 2, path: [195.0877], parent: null, linkedBy: 'reference', activations: ['HCD'] },
    ...{ isolation: { target: 195.09, lower: 0.5, upper: 0.5 }, scanIds: ['scan=2', 'scan=5'], energies: [30] },
    ...{ energyUnit: 'eV', analyser: 'orbitrap', time: [60, 66] },
    peaks: { mz: Float64Array.from(mz), intensity: Float64Array.from(intensity) },
    scanCounts: Uint16Array.from(mz, () => 2),
    ...change
  };
}

const assembled = (): AssembledTree => ({
  ...{ precursorMz: mzOf('C8H11N4O2') + 0.00005, charge: 1, polarity: 'positive', ms1: null, notes: [] },
  spectra: [
    spectrum(0, [83.1234, mzOf('C6H8N3O') + 0.0001, mzOf('C8H11N4O2')], [90, 1000, 250], {}),
    spectrum(1, [mzOf('C5H8N3') - 0.0001, mzOf('C6H8N3O')], [500, 80], {
      ...{ level: 3, path: [195.0877, 138.0662], parent: 0, activations: ['CID'] }
    })
  ]
});

/** A run with one annotated tree, as reading and suggesting would leave it. @returns the tree's id */
export async function makeTree(studyId: string, annotator: TestPerson, name = 'Unknown A'): Promise<string> {
  const db = database();
  const [runId, id] = [randomUUID(), randomUUID()];
  await db.insert(runs).values({
    ...{ id: runId, studyId, fileName: 'fraction-7.mzML', storageKey: runId, bytes: 10, state: 'ready' },
    ...{ sha1: '0'.repeat(40), sha256: 'a'.repeat(64) },
    info: {
      ...{ polarity: 'positive', ionSource: 'ESI', analysers: ['orbitrap'], instrument: null, startTime: null },
      scans: { '1': 2, '2': 2, '3': 2 }
    }
  });
  const settings = { elements: 'CHNO', adducts: [], tolerance: null, separateEnergies: false };
  await db.transaction(async (tx) => {
    await insertTree(tx, { id, studyId, runId, name, settings, createdBy: annotator.id }, assembled());
    await tx.update(trees).set({ adduct: '[M+H]+', formula: 'C8H10N4O2' }).where(eq(trees.id, id));
    for (const { spectrum, position, formula, from, loss, state } of CLAIMS)
      await tx
        .update(ions)
        .set({
          ...{ formula, state, loss, fromFormula: from, fromMz: from && mzOf(from), score: 5, dbe: 4.5 },
          ...{ errorPpm: 0.4, oddElectron: false, link: from ? 'measured' : null, isPrecursor: from === null },
          ...(state === 'confirmed' ? { decidedBy: annotator.id, decidedAt: new Date() } : {})
        })
        .where(and(eq(ions.treeId, id), eq(ions.spectrum, spectrum), eq(ions.position, position)));
    await updateExplained(tx, id);
  });
  return id;
}

/** One group with every role, a guest to whom the study is open and one to whom it is not, and a stranger's group. */
export async function makeReviewWorld() {
  const names = ['annotator', 'reviewer', 'second reviewer', 'lead', 'guest', 'guest elsewhere', 'stranger'];
  const [annotator, reviewer, second, lead, guest, otherGuest, stranger] = await Promise.all(names.map(makePerson));
  const groupId = await makeGroup('Shore', [
    ...(
      [
        [annotator, 'annotator'],
        [reviewer, 'reviewer'],
        [second, 'reviewer'],
        [lead, 'lead']
      ] as const
    ).map(([person, role]) => [person, role] as [TestPerson, typeof role]),
    [guest, 'guest'],
    [otherGuest, 'guest']
  ]);
  await makeGroup('Elsewhere', [[stranger, 'lead']]);
  const studyId = await makeStudy(groupId, 'Shore extracts');
  await database().insert(studyGuests).values({ studyId, userId: guest.id });
  return { annotator, reviewer, second, lead, guest, otherGuest, stranger, groupId, studyId };
}
export type ReviewWorld = Awaited<ReturnType<typeof makeReviewWorld>>;

/** Row id and version of the ion at a place. */
export async function ionAt(treeId: string, spectrum: number, position: number) {
  const [ion] = await database()
    .select()
    .from(ions)
    .where(and(eq(ions.treeId, treeId), eq(ions.spectrum, spectrum), eq(ions.position, position)));
  return ion;
}

export async function treeRow(treeId: string) {
  const [tree] = await database().select().from(trees).where(eq(trees.id, treeId));
  return tree;
}

export async function setApprovalsNeeded(groupId: string, approvalsNeeded: number): Promise<void> {
  const [group] = await database().select().from(groups).where(eq(groups.id, groupId));
  await database()
    .update(groups)
    .set({ defaults: { ...group.defaults, approvalsNeeded } })
    .where(eq(groups.id, groupId));
}
