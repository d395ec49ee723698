/** The files and the program that the benches of reading share. */
import { existsSync, mkdirSync, mkdtempSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { build } from 'esbuild';
import { option } from './goal';
import { writeLargeFile } from './mzml-file';

const root = resolve(import.meta.dirname, '../..');
const UNITS: Readonly<Record<string, number>> = { MB: 1e6, GB: 1e9 };

export function bytesOf(size: string): number {
  const [, number, unit] = /^(\d+)(MB|GB)$/.exec(size) ?? [];
  if (number === undefined) throw new RangeError(`"${size}" is no size such as 200MB or 1GB`);
  return Number(number) * UNITS[unit];
}

/** The program of one mode, bundled, so that no compiler takes memory in the measured process. */
export async function bundleProcess(folder: string): Promise<string> {
  const outfile = join(folder, 'mzml-process.mjs');
  await build({
    entryPoints: [join(root, 'tests/bench/mzml-process.ts')],
    outfile,
    alias: { $lib: join(root, 'src/lib') },
    bundle: true,
    platform: 'node',
    format: 'esm',
    target: 'node20',
    banner: { js: "import { createRequire } from 'node:module'; const require = createRequire(import.meta.url);" }
  });
  return outfile;
}

/** A fresh folder, removed at the end, or the one that was named. */
export function openFolder(args: readonly string[]): { folder: string; close: () => void } {
  const named = option(args, 'folder', '');
  if (named) {
    mkdirSync(named, { recursive: true });
    return { folder: resolve(named), close: () => undefined };
  }
  const folder = mkdtempSync(join(tmpdir(), 'rivenmark-bench-'));
  return { folder, close: () => rmSync(folder, { recursive: true, force: true }) };
}

export function fileOf(folder: string, size: string): string {
  const path = join(folder, `made-${size}.mzML`);
  const isThere = existsSync(path) && statSync(path).size > bytesOf(size) * 0.95;
  if (!isThere) writeLargeFile(path, bytesOf(size));
  return path;
}
