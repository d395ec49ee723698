/** `npm run backup -- FOLDER` and `npm run backup -- --restore FOLDER`. */
import { existsSync, mkdirSync } from 'node:fs';
import { join } from 'node:path';
import { parseArgs } from 'node:util';
import { checkBackup, restoreBackup, writeBackup } from './backup-copy';
import { runCommand } from './bootstrap.mjs';
import { startMariadb } from './mariadb';
import { claimFolder, runningProduct } from './run-record';
import { Advice, say } from './run-quietly.mjs';
import { filesFolder, readSettings, type Settings } from './settings';

const USAGE = `Usage:
  npm run backup -- FOLDER              writes a backup into a new folder inside FOLDER; the product may run
  npm run backup -- --restore BACKUP    puts a backup into a new data folder (set RIVENMARK_DATA), then \`npm start\``;

/** Does something with the database: the one of DATABASE_URL, of the running product, or one started for it. */
async function withDatabase(settings: Settings, work: (url: string) => Promise<void>): Promise<void> {
  const known = settings.databaseUrl ?? runningProduct(settings.data)?.databaseUrl;
  if (known) return work(known);
  const mariadb = await startMariadb({ folder: join(settings.data, 'mariadb') });
  try {
    await work(mariadb.url);
  } finally {
    await mariadb.stop();
  }
}

async function backup(settings: Settings, into: string): Promise<void> {
  if (!settings.databaseUrl && !existsSync(join(settings.data, 'mariadb')))
    throw new Advice(`There is nothing to back up in ${settings.data}. Set RIVENMARK_DATA as for \`npm start\`.`);
  const files = filesFolder(settings, process.env);
  await withDatabase(settings, async (databaseUrl) => {
    say(`Backup written: ${await writeBackup({ databaseUrl, files }, into, new Date())}`);
  });
  if (process.env.S3_BUCKET)
    say(`Run files lie in the bucket ${process.env.S3_BUCKET}: back that up by its own means.`);
}

async function restore(settings: Settings, folder: string): Promise<void> {
  checkBackup(folder);
  if (existsSync(join(settings.data, 'mariadb')))
    throw new Advice(`${settings.data} holds data. Set RIVENMARK_DATA to a new folder, restore, and start with it.`);
  mkdirSync(settings.data, { recursive: true, mode: 0o700 });
  await claimFolder(settings.data);
  const files = filesFolder(settings, process.env);
  await withDatabase(settings, (databaseUrl) => restoreBackup(folder, { databaseUrl, files }));
  say(`Restored into ${settings.data}. Start with the same RIVENMARK_DATA.`);
}

runCommand(async () => {
  const { values, positionals } = parseArgs({ options: { restore: { type: 'string' } }, allowPositionals: true });
  const settings = readSettings(process.env, []);
  if (values.restore && positionals.length === 0) await restore(settings, values.restore);
  else if (!values.restore && positionals.length === 1) await backup(settings, positionals[0]);
  else throw new Advice(USAGE);
  return 0;
});
