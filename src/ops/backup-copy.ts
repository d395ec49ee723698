import { cpSync, existsSync, mkdirSync, readdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { z } from 'zod';
import { dumpDatabase, loadDump } from './database-dump';
import { Advice } from './run-quietly.mjs';

const FORMAT = 'rivenmark-backup';
const manifestSchema = z.object({
  format: z.literal(FORMAT),
  version: z.literal(1),
  at: z.string(),
  files: z.boolean()
});

/** Where the data are that a backup holds. */
export interface DataPlaces {
  /** mysql://… */
  databaseUrl: string;
  /** folder of the run files; its part `store` is kept, transfers under way are not */
  files: string;
}

const places = (folder: string) => ({
  dump: join(folder, 'database.sql'),
  store: join(folder, 'store'),
  manifest: join(folder, 'backup.json')
});

/**
 * Writes a backup into a new folder inside `into`; the product may run meanwhile. Stored files never change, so the
 * files are copied before the dump, and those that came meanwhile after it: every file that the dump names is there.
 * @returns the new folder; it has its name only once the backup is complete
 */
export async function writeBackup({ databaseUrl, files }: DataPlaces, into: string, now: Date): Promise<string> {
  const name = `rivenmark-${now.toISOString().replace(/[-:]|\.\d+/g, '')}`;
  const folder = resolve(into, name);
  if (existsSync(folder)) throw new Advice(`${folder} is there already. Wait a second and try again.`);
  const part = `${folder}.part`;
  mkdirSync(part, { recursive: true, mode: 0o700 });
  const at = places(part);
  const store = join(files, 'store');
  const copy = () => {
    if (existsSync(store)) cpSync(store, at.store, { recursive: true, force: false, preserveTimestamps: true });
  };
  try {
    copy();
    await dumpDatabase(databaseUrl, at.dump);
    copy();
    const manifest = { format: FORMAT, version: 1, at: now.toISOString(), files: existsSync(store) };
    writeFileSync(at.manifest, JSON.stringify(manifest, null, 2) + '\n', { mode: 0o600 });
    renameSync(part, folder);
  } catch (error) {
    rmSync(part, { recursive: true, force: true });
    throw error;
  }
  return folder;
}

function readsAsManifest(file: string): boolean {
  try {
    return manifestSchema.safeParse(JSON.parse(readFileSync(file, 'utf8'))).success;
  } catch {
    return false;
  }
}

/** @throws Advice when the folder holds no complete backup */
export function checkBackup(folder: string): void {
  const at = places(resolve(folder));
  if (readsAsManifest(at.manifest) && existsSync(at.dump)) return;
  throw new Advice(
    `${resolve(folder)} holds no complete backup. Name the folder rivenmark-… that a backup made: it holds backup.json and database.sql.`
  );
}

/**
 * Puts a backup into an empty database and an empty folder.
 * @throws Advice when there are files already; Error when a statement of the dump fails
 */
export async function restoreBackup(folder: string, { databaseUrl, files }: DataPlaces): Promise<void> {
  checkBackup(folder);
  const at = places(resolve(folder));
  const store = join(files, 'store');
  if (existsSync(store) && readdirSync(store).length > 0)
    throw new Advice(
      `${store} holds files. Restore into a new data folder: set RIVENMARK_DATA to one that is not there yet.`
    );
  await loadDump(databaseUrl, at.dump);
  if (existsSync(at.store)) cpSync(at.store, store, { recursive: true, preserveTimestamps: true });
}
