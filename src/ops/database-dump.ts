import { spawn } from 'node:child_process';
import { closeSync, mkdtempSync, openSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { program } from './mariadb-folder';

/** Runs a client program of MariaDB; the password goes through a file that only the owner can read. */
async function runClient(
  name: string,
  url: string,
  args: string[],
  stdio: { in?: string; out?: string }
): Promise<void> {
  const { hostname, port, username, password, pathname } = new URL(url);
  const folder = mkdtempSync(join(tmpdir(), 'rivenmark-client-'));
  const settings = join(folder, 'client.cnf');
  const quoted = (text: string) => `"${decodeURIComponent(text).replace(/[\\"]/g, '\\$&')}"`;
  writeFileSync(
    settings,
    `[client]\nhost=${quoted(hostname)}\nport=${port || 3306}\nuser=${quoted(username)}\npassword=${quoted(password)}\n`,
    { mode: 0o600 }
  );
  const input = stdio.in ? openSync(stdio.in, 'r') : 'ignore';
  const output = stdio.out ? openSync(stdio.out, 'wx', 0o600) : 'ignore';
  try {
    await new Promise<void>((done, fail) => {
      const database = decodeURIComponent(pathname.slice(1));
      const child = spawn(program(name), [`--defaults-file=${settings}`, '--protocol=tcp', ...args, database], {
        stdio: [input, output, 'pipe']
      });
      let said = '';
      child.stderr?.on('data', (chunk: Buffer) => (said += chunk));
      child.once('error', fail);
      child.once('close', (code) =>
        code === 0 ? done() : fail(new Error(`${name} ended with status ${code}: ${said}`))
      );
    });
  } finally {
    for (const file of [input, output]) if (typeof file === 'number') closeSync(file);
    rmSync(folder, { recursive: true, force: true });
  }
}

/** Writes one consistent state of a database into a new file, as SQL. @throws Error when the dump fails */
export const dumpDatabase = (url: string, file: string): Promise<void> =>
  runClient(
    'mariadb-dump',
    url,
    [
      '--single-transaction',
      '--quick',
      '--hex-blob',
      '--triggers',
      '--no-tablespaces',
      '--default-character-set=utf8mb4'
    ],
    { out: file }
  );

/** Runs a dump in an empty database. @throws Error when a statement fails */
export const loadDump = (url: string, file: string): Promise<void> =>
  runClient('mariadb', url, ['--default-character-set=utf8mb4'], { in: file });
