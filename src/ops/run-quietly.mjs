import { spawn } from 'node:child_process';
import { root } from './root.mjs';

const TAIL = 30;
const EVERY = 15_000;

/** One line of progress for whoever waits. @param {string} text */
export function say(text) {
  process.stdout.write(`${text}\n`);
}

/** A failure that says everything itself; no stack trace is wanted. */
export class Advice extends Error {}

/**
 * Runs a program, telling every 15 s that it still works, and the end of its output when it fails.
 * @param {string} what said before it starts, e.g. "Installing npm packages"
 * @param {string} command
 * @param {string[]} args
 * @param {{ env?: NodeJS.ProcessEnv, cure: string }} options `cure`: what to do when it fails
 * @returns {Promise<void>}
 * @throws {Advice} when the program cannot be run or fails
 */
export function runQuietly(what, command, args, { env = process.env, cure }) {
  const started = Date.now();
  const seconds = () => `${Math.round((Date.now() - started) / 1000)} s`;
  say(`${what} …`);
  return new Promise((done, fail) => {
    const child = spawn(command, args, {
      cwd: root,
      env: { ...env, NO_COLOR: '1', FORCE_COLOR: '0' },
      stdio: ['ignore', 'pipe', 'pipe']
    });
    /** @type {string[]} */
    let lines = [];
    /** @param {Buffer} chunk */
    const keep = (chunk) => {
      lines = [
        ...lines,
        ...chunk
          .toString()
          .split(/[\r\n]+/)
          .filter(Boolean)
      ].slice(-TAIL);
    };
    child.stdout.on('data', keep);
    child.stderr.on('data', keep);
    const beat = setInterval(() => say(`  still at it after ${seconds()}`), EVERY);
    const stop = () => child.kill('SIGTERM');
    process.on('SIGINT', stop).on('SIGTERM', stop);
    /** @param {string} reason */
    const failed = (reason) => fail(new Advice(`${lines.join('\n')}\n${what} failed: ${reason}.\n${cure}`));
    const settle = () => {
      clearInterval(beat);
      process.off('SIGINT', stop).off('SIGTERM', stop);
    };
    child.once('error', (error) => {
      settle();
      failed(error.message);
    });
    child.once('close', (code, signal) => {
      settle();
      if (code === 0) {
        say(`  done in ${seconds()}`);
        done();
      } else failed(signal ? `it was ended by ${signal}` : `${command} ended with status ${code}`);
    });
  });
}
