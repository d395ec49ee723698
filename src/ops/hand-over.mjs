import { spawn } from 'node:child_process';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { root } from './root.mjs';

const WATCH = pathToFileURL(join(root, 'src/ops/end-with-parent.mjs')).href;

/**
 * Goes on in a TypeScript file, now that the npm packages are there. Signals are handed on; if this process is killed
 * the other one ends itself.
 * @param {string} file under src/ops
 * @param {string[]} args
 * @returns {Promise<number>} its exit status
 */
export function handOver(file, args) {
  return new Promise((done, fail) => {
    const child = spawn(
      process.execPath,
      ['--import', WATCH, '--import', 'tsx', join(root, 'src/ops', file), ...args],
      { cwd: root, stdio: ['inherit', 'inherit', 'inherit', 'ipc'] }
    );
    for (const name of /** @type {const} */ (['SIGINT', 'SIGTERM', 'SIGHUP'])) process.on(name, () => child.kill(name));
    child.once('error', fail);
    child.once('exit', (code, signal) => {
      if (signal) process.stdout.write(`\nEnded by ${signal}. The next start clears up what was left behind.\n`);
      done(code ?? 1);
    });
  });
}
