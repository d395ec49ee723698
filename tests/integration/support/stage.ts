import { createHash, randomUUID } from 'node:crypto';
import { Readable } from 'node:stream';
import { writeMzml, type ScanToWrite } from '$lib/core/mzml';
import type { PrecursorRecord } from '$lib/core/model';
import { initialGroupDefaults, type Role } from '$lib/schema/group';
import type { Actor } from '$lib/server/auth/authorize';
import { closeDatabase } from '$lib/server/db';
import type { Database } from '$lib/server/db/connection';
import { groups, memberships, runs, studies, users } from '$lib/server/db/schema';
import { enqueue } from '$lib/server/jobs/queue';
import { fileStore } from '$lib/server/storage';
import { openTestDatabase } from '../../helpers/database';

/** Environment of the product for one test file: its own database and folder. */
export interface Stage {
  folder: string;
  url: string;
  close(): Promise<void>;
}

/** Opens a database of this file's own and sets what the server's `config()` reads. Call before the first use of it. */
export async function openStage(settings: Record<string, string> = {}): Promise<Stage> {
  const opened = await openTestDatabase();
  Object.assign(process.env, { RIVENMARK_HEARTBEAT: '200', LOG_LEVEL: 'silent', ...settings });
  return {
    folder: opened.env.RIVENMARK_FILES,
    url: opened.url,
    close: async () => {
      await closeDatabase();
      await opened.close();
    }
  };
}

/** A person without a usable password. */
export async function addPerson(db: Database, name: string): Promise<Actor> {
  const id = randomUUID();
  await db.insert(users).values({ id, name, email: `${id}@example.invalid`, passwordHash: 'none' });
  return { id, name };
}

/** A group with one study and members in the given roles. */
export async function addStudy(db: Database, members: [Actor, Role][]) {
  const groupId = randomUUID();
  const studyId = randomUUID();
  await db.insert(groups).values({ id: groupId, name: 'Group', defaults: initialGroupDefaults });
  for (const [{ id: userId }, role] of members) await db.insert(memberships).values({ groupId, userId, role });
  await db.insert(studies).values({ id: studyId, groupId, name: 'Study', description: '', updatedAt: new Date() });
  return { groupId, studyId };
}

/** A run whose file lies in the store, with its job queued. */
export async function addRun(db: Database, place: { groupId: string; studyId: string }, bytes: Uint8Array) {
  const id = randomUUID();
  const storageKey = `runs/${id}`;
  await fileStore().put(storageKey, Readable.from([Buffer.from(bytes)]), bytes.length);
  const hash = (kind: string) => createHash(kind).update(bytes).digest('hex');
  const row = { id, studyId: place.studyId, fileName: 'run.mzML', storageKey, bytes: bytes.length };
  await db.insert(runs).values({ ...row, sha1: hash('sha1'), sha256: hash('sha256') });
  const jobId = await enqueue(db, {
    ...place,
    kind: 'read-run',
    subjectId: id,
    input: {},
    createdBy: null,
    what: 'Waiting'
  });
  return { runId: id, jobId };
}

const precursor = (ref: string, mz: number): PrecursorRecord => ({
  spectrumRef: ref,
  level: null,
  isolation: { target: mz, lower: 0.5, upper: 0.5 },
  selectedMz: mz,
  charge: 1,
  intensity: 1e5,
  activations: ['HCD'],
  energy: 30,
  energyUnit: 'eV'
});

/** Calculated m/z of caffeine [M+H]+ and of three of its product ions (C8H11N4O2, C6H8N3O, C5H8N3, C4H7N2). */
export const IONS = { precursor: 195.0877, first: 138.0662, second: 110.0713, third: 83.0604 };

/** A small run: MS1, MS2, MS3 repeated, of one precursor ion. @param cycles number of repetitions, three scans each */
export function smallRun(cycles = 3): Uint8Array {
  const scans: ScanToWrite[] = [];
  const id = (n: number) => `scan=${n}`;
  const peaks = (list: [number, number][]) => ({
    mz: Float64Array.from(list, ([mz]) => mz),
    intensity: Float64Array.from(list, ([, intensity]) => intensity)
  });
  const base = { polarity: 'positive', analyser: 'orbitrap', centroided: true } as const;
  for (let i = 0; i < cycles; i++) {
    const n = i * 3 + 1;
    const ms1 = peaks([
      [150.1, 1e3],
      [IONS.precursor, 1e6],
      [196.091, 9e4]
    ]);
    const ms2 = peaks([
      [IONS.second, 3e4],
      [IONS.first, 4e5],
      [IONS.precursor, 2e5]
    ]);
    const ms3 = peaks([
      [IONS.third, 2e4],
      [IONS.second, 9e4]
    ]);
    scans.push({ ...base, id: id(n), level: 1, time: i * 3, peaks: ms1 });
    scans.push({
      ...base,
      id: id(n + 1),
      level: 2,
      time: i * 3 + 1,
      peaks: ms2,
      precursors: [precursor(id(n), IONS.precursor)]
    });
    scans.push({
      ...base,
      id: id(n + 2),
      level: 3,
      time: i * 3 + 2,
      peaks: ms3,
      precursors: [precursor(id(n + 1), IONS.first)]
    });
  }
  return writeMzml({ id: 'small', scans, ionSource: 'ESI', analyser: 'orbitrap' }, { sha1: sha1Hash });
}

const sha1Hash = () => {
  const hash = createHash('sha1');
  return { update: (bytes: Uint8Array) => void hash.update(bytes), hex: () => hash.digest('hex') };
};

/** Waits until a check gives something, at most `patience` ms. */
export async function until<T>(check: () => Promise<T | null | undefined | false>, patience = 30_000): Promise<T> {
  const start = performance.now();
  for (;;) {
    const found = await check();
    if (found) return found;
    if (performance.now() - start > patience) throw new Error(`nothing happened within ${patience} ms`);
    await new Promise((resolve) => setTimeout(resolve, 50));
  }
}
