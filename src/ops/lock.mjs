import { createHash } from 'node:crypto';
import { readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { root } from './root.mjs';
import { say } from './run-quietly.mjs';

const POLL = 250;

/** @param {number} pid */
function alive(pid) {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return /** @type {NodeJS.ErrnoException} */ (error).code === 'EPERM';
  }
}

/** @param {string} path */
function holder(path) {
  try {
    return Number(readFileSync(path, 'utf8'));
  } catch {
    return 0;
  }
}

/** @param {string} path */
function taken(path) {
  try {
    writeFileSync(path, String(process.pid), { flag: 'wx', mode: 0o600 });
    return true;
  } catch (error) {
    if (/** @type {NodeJS.ErrnoException} */ (error).code !== 'EEXIST') throw error;
    return false;
  }
}

/**
 * Does something that two processes of this project folder must not do at once (install, build); the second waits.
 * A lock whose process is gone is taken over.
 * @template T
 * @param {string} name
 * @param {() => Promise<T>} work
 * @returns {Promise<T>}
 */
export async function withLock(name, work) {
  const folder = createHash('sha256').update(root).digest('hex').slice(0, 12);
  const path = join(tmpdir(), `rivenmark-${process.getuid?.() ?? 0}-${folder}-${name}.lock`);
  for (let told = false; !taken(path);) {
    const pid = holder(path);
    // An empty file was made this instant; its writer is about to fill it.
    if (pid > 0 && !alive(pid)) rmSync(path, { force: true });
    else if (!told) {
      say(`Waiting for another ${name} in this folder (process ${pid}) …`);
      told = true;
    }
    await new Promise((next) => setTimeout(next, POLL));
  }
  try {
    return await work();
  } finally {
    rmSync(path, { force: true });
  }
}
