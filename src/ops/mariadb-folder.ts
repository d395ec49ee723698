import { randomBytes } from 'node:crypto';
import {
  chmodSync,
  existsSync,
  mkdirSync,
  mkdtempSync,
  readFileSync,
  renameSync,
  rmSync,
  symlinkSync,
  writeFileSync
} from 'node:fs';
import { tmpdir, userInfo } from 'node:os';
import { join, resolve } from 'node:path';
import { spawnSync } from 'node:child_process';
import { findProgram } from './find-program.mjs';
import { commandLine, endForeign } from './process';

export const DATABASE = 'rivenmark';
export const USER = 'rivenmark';
/** The kernel's limit on the path of a socket, in bytes, without the closing zero. */
const SOCKET_LIMIT = 107;

/** Where one MariaDB keeps its things. All folders are readable by their owner alone. */
export interface MariadbFolder {
  root: string;
  data: string;
  tmp: string;
  pidFile: string;
  initFile: string;
  log: string;
  socket: string;
  /** a folder made for the socket alone, to be removed at the end; null where the socket lies in `root` */
  socketFolder: string | null;
}

/** MariaDB refuses to run as root unless it is told so. */
export const asRoot = (): string[] => (process.getuid?.() === 0 ? ['--user=root'] : []);

/** @throws Error with the command that installs it */
export function program(...names: string[]): string {
  const path = findProgram(...names);
  if (path) return path;
  throw new Error(
    `${names[0]} is not installed. Install it with \`apt-get install --no-install-recommends mariadb-server\` and start again.`
  );
}

/** A fresh folder with a short, plain path. */
const shortFolder = () => mkdtempSync(join(/^[\w./-]{1,60}$/.test(tmpdir()) ? tmpdir() : '/tmp', 'rivenmark-'));

/** Makes the folders that are missing and says where things are. */
export function mariadbFolder(folder: string): MariadbFolder {
  const root = resolve(folder);
  const at = {
    root,
    data: join(root, 'data'),
    tmp: join(root, 'tmp'),
    pidFile: join(root, 'm.pid'),
    initFile: join(root, 'init.sql'),
    log: join(root, 'mariadb.log')
  };
  for (const path of [at.root, at.tmp]) {
    mkdirSync(path, { recursive: true, mode: 0o700 });
    chmodSync(path, 0o700);
  }
  const near = join(root, 'm.sock');
  if (Buffer.byteLength(near) <= SOCKET_LIMIT) return { ...at, socket: near, socketFolder: null };
  const socketFolder = shortFolder();
  return { ...at, socket: join(socketFolder, 'm.sock'), socketFolder };
}

/** The generated password of this folder's database user; made when first asked for, readable by the owner alone. */
export function password(at: MariadbFolder): string {
  const path = join(at.root, 'secret.json');
  if (existsSync(path)) {
    const { password: known } = JSON.parse(readFileSync(path, 'utf8')) as { password?: unknown };
    if (typeof known === 'string' && /^[\w-]{20,}$/.test(known)) return known;
    throw new Error(`${path} holds no password. Remove that file: a new password is made at the next start.`);
  }
  const made = randomBytes(24).toString('base64url');
  writeFileSync(path, JSON.stringify({ password: made }), { mode: 0o600 });
  return made;
}

/** What the server runs at each start: database and user exist, with the password of the folder. */
export function writeInitFile(at: MariadbFolder, secret: string): void {
  const user = `'${USER}'@'127.0.0.1'`;
  // The second grant covers databases that tests make; _ is a wildcard there unless escaped.
  const lines = [
    `CREATE DATABASE IF NOT EXISTS \`${DATABASE}\` CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_520_ci;`,
    `CREATE USER IF NOT EXISTS ${user} IDENTIFIED BY '${secret}';`,
    `ALTER USER ${user} IDENTIFIED BY '${secret}';`,
    `GRANT ALL ON \`${DATABASE}\`.* TO ${user};`,
    `GRANT ALL ON \`${DATABASE}\\_%\`.* TO ${user};`
  ];
  writeFileSync(at.initFile, lines.join('\n') + '\n', { mode: 0o600 });
}

/**
 * Ends a server that a killed process left behind on this folder: it would hold the folder's lock. A pid that now
 * belongs to anything else is left alone.
 */
export async function endLeftOver(at: MariadbFolder): Promise<void> {
  if (!existsSync(at.pidFile)) return;
  const pid = Number(readFileSync(at.pidFile, 'utf8').trim());
  const mark = `--datadir=${at.data} `;
  const line = Number.isInteger(pid) && pid > 1 ? commandLine(pid) : null;
  if (line?.includes(mark)) {
    await endForeign(pid, mark, 15_000);
    const socketFolder = /--socket=(\/\S*\/rivenmark-\w{6})\/m\.sock/.exec(line)?.[1];
    if (socketFolder) rmSync(socketFolder, { recursive: true, force: true });
  }
  rmSync(at.pidFile, { force: true });
}

/**
 * Runs MariaDB's installer. It is a shell script that breaks at a blank in a path, so it sees the folder through a link.
 * @returns what it said, or null when all went well
 */
function runInstaller(at: MariadbFolder, name: string): string | null {
  const plain = shortFolder();
  try {
    const link = join(plain, 'to');
    symlinkSync(at.root, link);
    const args = [
      '--no-defaults',
      '--basedir=/usr',
      `--datadir=${join(link, name)}`,
      `--tmpdir=${join(link, 'tmp')}`,
      ...asRoot(),
      '--auth-root-authentication-method=socket',
      `--auth-root-socket-user=${userInfo().username}`,
      '--skip-test-db',
      '--skip-name-resolve'
    ];
    const { status, error, stdout, stderr } = spawnSync(program('mariadb-install-db'), args, { encoding: 'utf8' });
    return status === 0 ? null : (error?.message ?? `${stdout}${stderr}`);
  } finally {
    rmSync(plain, { recursive: true, force: true });
  }
}

/** Installs the system tables where there are none. An interrupted earlier try is thrown away. */
export function installTables(at: MariadbFolder): void {
  if (existsSync(at.data)) return;
  const fresh = join(at.root, 'data.new');
  rmSync(fresh, { recursive: true, force: true });
  const trouble = runInstaller(at, 'data.new');
  if (trouble !== null)
    throw new Error(
      `MariaDB could not make its data folder ${at.data}.\n${trouble}\n` +
        'Check free space and write permission there, then start again.'
    );
  renameSync(fresh, at.data);
}
