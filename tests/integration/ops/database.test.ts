import { createConnection, type RowDataPacket } from 'mysql2/promise';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { loadedDemo, stampDemo } from '../../../src/ops/demo-stamp';
import { migrateDatabase } from '../../../src/ops/migrate';
import { openTestDatabase, type TestDatabase } from '../../helpers/database';

let first: TestDatabase;
let second: TestDatabase;
beforeAll(async () => {
  first = await openTestDatabase();
  second = await openTestDatabase();
});
afterAll(async () => {
  await second.close();
  await first.close();
});

async function ask(url: string, statement: string): Promise<RowDataPacket[]> {
  const connection = await createConnection({ uri: url });
  try {
    const [rows] = await connection.query<RowDataPacket[]>(statement);
    return rows;
  } finally {
    await connection.end();
  }
}

describe('openTestDatabase', () => {
  it('gives each caller tables of its own', async () => {
    await ask(first.url, "INSERT INTO `rate_limits` (`key`, window_start, hits) VALUES ('a', NOW(3), 1)");
    expect(await ask(first.url, 'SELECT hits FROM rate_limits')).toHaveLength(1);
    expect(await ask(second.url, 'SELECT hits FROM rate_limits')).toHaveLength(0);
  });

  it('sets what the server reads', () => {
    expect(process.env.DATABASE_URL).toBe(second.url);
    expect(process.env.RIVENMARK_FILES).toBe(second.env.RIVENMARK_FILES);
  });
});

describe('migrateDatabase', () => {
  it('may be called by several processes at once', async () => {
    await ask(second.url, 'CREATE OR REPLACE DATABASE rivenmark_t_twice');
    const url = new URL(second.url);
    url.pathname = '/rivenmark_t_twice';
    await Promise.all([migrateDatabase(url.href), migrateDatabase(url.href), migrateDatabase(url.href)]);
    const [{ n }] = await ask(url.href, 'SELECT COUNT(*) AS n FROM __drizzle_migrations');
    const [{ n: once }] = await ask(first.url, 'SELECT COUNT(*) AS n FROM __drizzle_migrations');
    await ask(second.url, 'DROP DATABASE rivenmark_t_twice');
    expect(n).toBe(once);
  });

  it('throws when a migration fails', async () => {
    await ask(second.url, 'CREATE OR REPLACE DATABASE rivenmark_t_bad');
    const url = new URL(second.url);
    url.pathname = '/rivenmark_t_bad';
    await ask(url.href, 'CREATE TABLE users (id int)');
    await expect(migrateDatabase(url.href)).rejects.toThrow(/users/);
    await ask(second.url, 'DROP DATABASE rivenmark_t_bad');
  });
});

describe('the stamp of the demo', () => {
  it('is there once it was set', async () => {
    const account = { name: 'Reviewer', email: 'reviewer@demo.invalid', password: 'for-everybody' };
    expect(await loadedDemo(first.url)).toBeNull();
    await stampDemo(first.url, [account]);
    expect(await loadedDemo(first.url)).toEqual([account]);
    expect(await loadedDemo(second.url)).toBeNull();
  });
});
