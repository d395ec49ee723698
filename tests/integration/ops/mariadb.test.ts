import { spawn } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { createConnection, type RowDataPacket } from 'mysql2/promise';
import { afterAll, describe, expect, it } from 'vitest';
import { startMariadb } from '../../../src/ops/mariadb';
import { commandLine, sleep } from '../../../src/ops/process';

const top = mkdtempSync(join(tmpdir(), 'rivenmark-mariadb-'));
afterAll(() => rmSync(top, { recursive: true, force: true }));

async function ask(url: string, statement: string): Promise<RowDataPacket[]> {
  const connection = await createConnection({ uri: url });
  try {
    const [rows] = await connection.query<RowDataPacket[]>(statement);
    return rows;
  } finally {
    await connection.end();
  }
}

describe('startMariadb', () => {
  // Longer than the kernel allows for a socket, with a blank and a letter beyond ASCII.
  const folder = join(top, 'a folder with ä', 'x'.repeat(110));

  it('keeps data, rights and password over a stop and a start', async () => {
    const first = await startMariadb({ folder });
    const url = await first.createDatabase('rivenmark_keep');
    await ask(url, 'CREATE TABLE kept (n int)');
    await ask(url, 'INSERT INTO kept VALUES (7)');
    await first.stop();
    expect(commandLine(first.pid)).toBeNull();

    const second = await startMariadb({ folder });
    const kept = new URL(second.url);
    kept.pathname = '/rivenmark_keep';
    const rows = await ask(kept.href, 'SELECT n, @@time_zone AS zone, @@bind_address AS bound FROM kept');
    await second.stop();
    expect(rows).toEqual([{ n: 7, zone: '+00:00', bound: '127.0.0.1' }]);
    expect(second.password).toBe(first.password);
  });

  it('shows its password to the owner alone', () => {
    expect(statSync(folder).mode & 0o777).toBe(0o700);
    expect(statSync(join(folder, 'secret.json')).mode & 0o777).toBe(0o600);
    expect(existsSync(join(folder, 'init.sql'))).toBe(false);
  });

  it('refuses a database outside its own names', async () => {
    const mariadb = await startMariadb({ folder });
    const foreign = mariadb.createDatabase('mysql');
    await expect(foreign).rejects.toThrow(RangeError);
    await expect(ask(mariadb.url, 'CREATE DATABASE elsewhere')).rejects.toThrow(/denied/i);
    await mariadb.stop();
  });

  it('takes over from a server whose starter was killed', async () => {
    const script = `import { startMariadb } from ${JSON.stringify(join(process.cwd(), 'src/ops/mariadb.ts'))};
      const m = await startMariadb({ folder: ${JSON.stringify(folder)} });
      console.log('pid=' + m.pid); setInterval(() => {}, 1000);`;
    const starter = spawn(process.execPath, ['--import', 'tsx', '--input-type=module', '-e', script]);
    let output = '';
    starter.stdout.on('data', (chunk) => (output += chunk));
    while (starter.exitCode === null && !/pid=\d+\n/.test(output)) await sleep(50);
    starter.kill('SIGKILL');
    const left = Number(/pid=(\d+)/.exec(output)?.[1]);
    expect(commandLine(left)).toContain('--datadir=');

    const next = await startMariadb({ folder });
    expect(commandLine(left)).toBeNull();
    await next.stop();
  });

  it('leaves a process alone whose number stands in an old pid file by chance', async () => {
    const bystander = spawn('sleep', ['60']);
    writeFileSync(join(folder, 'm.pid'), `${bystander.pid}\n`);
    const mariadb = await startMariadb({ folder });
    expect(commandLine(bystander.pid ?? 0)).toContain('sleep');
    bystander.kill();
    await mariadb.stop();
  });

  it('tells the end of the log when the server cannot start', async () => {
    const mariadb = await startMariadb({ folder });
    const other = startMariadb({ folder: join(top, 'other'), port: mariadb.port });
    await expect(other).rejects.toThrow(/did not start[^]*log/);
    expect(readFileSync(join(top, 'other', 'mariadb.log'), 'utf8')).toMatch(/in use/);
    await mariadb.stop();
  });
});
