import { mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { createConnection, type Connection, type RowDataPacket } from 'mysql2/promise';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { checkBackup, restoreBackup, writeBackup } from '../../../src/ops/backup-copy';
import { startMariadb, type Mariadb } from '../../../src/ops/mariadb';
import { migrateDatabase } from '../../../src/ops/migrate';
import { openTestDatabase, type TestDatabase } from '../../helpers/database';

const top = mkdtempSync(join(tmpdir(), 'rivenmark-backup-'));
let from: TestDatabase;
let to: Mariadb;
beforeAll(async () => {
  from = await openTestDatabase();
  to = await startMariadb({ folder: join(top, 'mariadb'), quick: true });
});
afterAll(async () => {
  await to.stop();
  await from.close();
  rmSync(top, { recursive: true, force: true });
});

async function on<T>(url: string, work: (connection: Connection) => Promise<T>): Promise<T> {
  const connection = await createConnection({ uri: url });
  try {
    return await work(connection);
  } finally {
    await connection.end();
  }
}

describe('a backup', () => {
  const name = 'Gruppe Ä · "C₁₇H₂₁NO₄" \\ ⁺';
  const file = Buffer.from([0, 255, 10, 13, 39, 92]);
  let folder: string;

  it('is one complete folder', async () => {
    mkdirSync(join(from.env.RIVENMARK_FILES, 'store/ab'), { recursive: true });
    writeFileSync(join(from.env.RIVENMARK_FILES, 'store/ab/run'), file);
    await on(from.url, (c) => c.query("INSERT INTO `groups` (id, name, defaults) VALUES ('g1', ?, '{}')", [name]));
    const places = { databaseUrl: from.url, files: from.env.RIVENMARK_FILES };
    folder = await writeBackup(places, join(top, 'kept'), new Date('2030-01-02T03:04:05.678Z'));
    expect(readdirSync(join(top, 'kept'))).toEqual(['rivenmark-20300102T030405Z']);
  });

  it('comes back on another server with rows, files and the rules of the database', async () => {
    const files = join(top, 'restored');
    await restoreBackup(folder, { databaseUrl: to.url, files });
    await migrateDatabase(to.url);
    expect(readFileSync(join(files, 'store/ab/run'))).toEqual(file);
    const [rows] = await on(to.url, (c) => c.query<RowDataPacket[]>('SELECT name FROM `groups`'));
    expect(rows).toEqual([{ name }]);
    const triggers = (url: string) => on(url, async (c) => (await c.query<RowDataPacket[]>('SHOW TRIGGERS'))[0].length);
    expect(await triggers(from.url)).toBeGreaterThan(0);
    expect(await triggers(to.url)).toBe(await triggers(from.url));
  });

  it('is not put over files that are there', async () => {
    const again = restoreBackup(folder, { databaseUrl: to.url, files: join(top, 'restored') });
    await expect(again).rejects.toThrow(/holds files/);
  });

  it('leaves nothing behind when the dump fails', async () => {
    const away = new URL(from.url);
    away.pathname = '/rivenmark_t_none';
    const places = { databaseUrl: away.href, files: from.env.RIVENMARK_FILES };
    await expect(writeBackup(places, join(top, 'bad'), new Date())).rejects.toThrow(/mariadb-dump/);
    expect(readdirSync(join(top, 'bad'))).toEqual([]);
  });

  it('is told from any other folder', () => {
    expect(() => checkBackup(top)).toThrow(/no complete backup/);
  });
});
