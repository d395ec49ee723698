/** What must be there before any npm package can be used: Node, the npm packages, Debian's packages. */
import { existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { findProgram } from './find-program.mjs';
import { withLock } from './lock.mjs';
import { root } from './root.mjs';
import { Advice, runQuietly, say } from './run-quietly.mjs';

const LEAST_NODE = [20, 19];

/** @typedef {{ name: string, there: () => boolean }} DebianPackage */

/** @type {DebianPackage} */
export const MARIADB = {
  name: 'mariadb-server',
  there: () => findProgram('mariadbd', 'mysqld') !== null && findProgram('mariadb-install-db') !== null
};
/** @type {DebianPackage[]} */
export const FOR_TESTS = [
  MARIADB,
  { name: 'chromium', there: () => existsSync('/usr/bin/chromium') },
  { name: 'fonts-liberation', there: () => existsSync('/usr/share/fonts/truetype/liberation') }
];

function checkNode() {
  const [major, minor] = process.versions.node.split('.').map(Number);
  if (major > LEAST_NODE[0] || (major === LEAST_NODE[0] && minor >= LEAST_NODE[1])) return;
  throw new Advice(
    `Node ${process.versions.node} is too old; ${LEAST_NODE.join('.')} or newer is needed. Install it and start again.`
  );
}

/** @typedef {{ version?: string, optional?: boolean, devOptional?: boolean }} Locked */

/** @param {string} path @returns {Record<string, Locked>} */
const lockedPackages = (path) => JSON.parse(readFileSync(path, 'utf8')).packages;

/**
 * Whether node_modules holds what the lock file asks for. npm writes its own list there as the last step of an
 * installation, so an interrupted one is not mistaken for a complete one.
 */
function npmPackagesAreThere() {
  const list = join(root, 'node_modules/.package-lock.json');
  if (!existsSync(list)) return false;
  const installed = lockedPackages(list);
  return Object.entries(lockedPackages(join(root, 'package-lock.json'))).every(
    ([path, { version, optional, devOptional }]) =>
      path === '' || optional || devOptional || installed[path]?.version === version
  );
}

async function installNpmPackages() {
  if (npmPackagesAreThere()) return;
  await withLock('installation', async () => {
    if (npmPackagesAreThere()) return;
    await runQuietly('Installing npm packages by the lock file', 'npm', ['ci', '--include=dev', '--no-progress'], {
      cure: 'Check the network and the free disk space, then start again; `npm ci` in this folder shows more.'
    });
  });
}

/** The TypeScript settings extend a file that SvelteKit writes; without it no TypeScript can be run. */
async function writeTypeScriptSettings() {
  if (existsSync(join(root, '.svelte-kit/tsconfig.json'))) return;
  const sync = [join(root, 'node_modules/@sveltejs/kit/svelte-kit.js'), 'sync'];
  await runQuietly('Preparing TypeScript', process.execPath, sync, {
    env: { ...process.env, RIVENMARK_KIT_DIR: '' },
    cure: 'Correct what the message names, then start again.'
  });
}

/** @param {DebianPackage[]} wanted */
async function installDebianPackages(wanted) {
  const missing = wanted.filter((item) => !item.there()).map((item) => item.name);
  if (missing.length === 0) return;
  const install = ['-o', 'DPkg::Lock::Timeout=400', 'install', '-y', '--no-install-recommends', ...missing];
  const byHand = `apt-get update && apt-get install -y --no-install-recommends ${missing.join(' ')}`;
  if (process.getuid?.() !== 0 || findProgram('apt-get') === null)
    throw new Advice(
      `Not installed: ${missing.join(', ')}. Installing needs root and Debian's apt. Run as root:\n  ${byHand}\nthen start again.`
    );
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' };
  const cure = `Check the network and Debian's package sources, or run by hand:\n  ${byHand}\nthen start again.`;
  await runQuietly('Refreshing the list of Debian packages', 'apt-get', ['-o', 'DPkg::Lock::Timeout=400', 'update'], {
    env,
    cure
  });
  await runQuietly(`Installing ${missing.join(', ')} from Debian`, 'apt-get', install, { env, cure });
  const still = wanted.filter((item) => !item.there()).map((item) => item.name);
  if (still.length > 0) throw new Advice(`apt installed ${still.join(', ')}, but the programs are not there.\n${cure}`);
}

/**
 * Installs what is missing; seconds when nothing is.
 * @param {DebianPackage[]} debian
 * @throws {Advice} saying what to do
 */
export async function bootstrap(debian) {
  checkNode();
  await installDebianPackages(debian);
  await installNpmPackages();
  await writeTypeScriptSettings();
}

/**
 * Runs the main function of a command: a failure that explains itself is printed without a stack trace.
 * @param {() => Promise<number>} main resolves with the exit status
 */
export function runCommand(main) {
  main().then(
    (status) => {
      process.exitCode = status;
    },
    (error) => {
      say(error instanceof Advice ? `\n${error.message}` : `\n${error instanceof Error ? error.stack : error}`);
      process.exitCode = 1;
    }
  );
}
