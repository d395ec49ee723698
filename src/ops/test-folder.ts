import {
  cpSync,
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  renameSync,
  rmSync,
  statSync,
  utimesSync
} from 'node:fs';
import { join } from 'node:path';
import { buildInto, builtFrom } from './build';
import { withLock } from './lock.mjs';
import { mariadbFolder, endLeftOver } from './mariadb-folder';
import { commandLine } from './process';
import { root } from './root.mjs';
import { sourcesHash } from './sources';

const TOP = join(root, '.test-data');
const BUILDS = join(TOP, 'builds');
const RUN = /^run-(\d+)-/;
/** ms; a build that no test has used for so long is thrown away */
const OLD = 24 * 3600 * 1000;

/** Throws away what killed test runs left: their database server, then their folder. */
export async function sweepDeadRuns(): Promise<void> {
  if (!existsSync(TOP)) return;
  for (const name of readdirSync(TOP)) {
    const pid = Number(RUN.exec(name)?.[1] ?? process.pid);
    if (pid === process.pid || commandLine(pid)?.includes('src/ops/test.ts')) continue;
    const mariadb = join(TOP, name, 'mariadb');
    if (existsSync(mariadb)) await endLeftOver(mariadbFolder(mariadb));
    rmSync(join(TOP, name), { recursive: true, force: true });
  }
}

/** A fresh folder for one run of the tests. */
export function makeRunFolder(): string {
  mkdirSync(TOP, { recursive: true, mode: 0o700 });
  return mkdtempSync(join(TOP, `run-${process.pid}-`));
}

function throwAwayOldBuilds(keep: string): void {
  for (const name of readdirSync(BUILDS)) {
    const path = join(BUILDS, name);
    if (path !== keep && Date.now() - statSync(path).mtimeMs > OLD) rmSync(path, { recursive: true, force: true });
  }
}

/**
 * A build of the product for tests, apart from the one that may be running, made when the sources changed.
 * @returns its folder, named by the hash of the sources, so that it never changes under a test
 * @throws Advice when the product cannot be built
 */
export function ensureTestBuild(): Promise<string> {
  return withLock('test build', async () => {
    const hash = sourcesHash();
    const folder = join(BUILDS, hash.slice(0, 16));
    mkdirSync(BUILDS, { recursive: true });
    if (builtFrom(folder) !== hash) {
      rmSync(folder, { recursive: true, force: true });
      const fresh = `${folder}.new`;
      rmSync(fresh, { recursive: true, force: true });
      if (builtFrom(join(root, 'build')) === hash) cpSync(join(root, 'build'), fresh, { recursive: true });
      else await buildInto(fresh, join('.test-data', 'kit'));
      // Whoever copied may have copied in the middle of a rebuild.
      if (builtFrom(fresh) !== hash) await buildInto(fresh, join('.test-data', 'kit'));
      renameSync(fresh, folder);
    }
    utimesSync(folder, new Date(), new Date());
    throwAwayOldBuilds(folder);
    return folder;
  });
}
