import { existsSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';
import { build as bundle } from 'esbuild';
import { runCommand } from './bootstrap.mjs';
import { withLock } from './lock.mjs';
import { root } from './root.mjs';
import { runQuietly } from './run-quietly.mjs';
import { sourcesHash } from './sources';

/** Entry points of worker threads, by the name of the file they become under workers/. */
const WORKERS: Record<string, string> = { worker: 'src/lib/server/jobs/worker.ts' };

const stampOf = (folder: string) => join(folder, '.stamp');

/** Hash of the sources that a build was made from, or null where there is no complete build. */
export function builtFrom(folder: string): string | null {
  return existsSync(stampOf(folder)) ? readFileSync(stampOf(folder), 'utf8') : null;
}

async function bundleWorkers(folder: string): Promise<void> {
  await bundle({
    entryPoints: Object.fromEntries(Object.entries(WORKERS).map(([name, path]) => [name, join(root, path)])),
    outdir: join(folder, 'workers'),
    outExtension: { '.js': '.mjs' },
    alias: { $lib: join(root, 'src/lib') },
    bundle: true,
    platform: 'node',
    format: 'esm',
    target: 'node20',
    packages: 'external',
    sourcemap: 'linked',
    logLevel: 'warning'
  });
}

/**
 * Builds the web server and the worker threads into a folder.
 * @param folder where the build goes; its old contents are replaced
 * @param kitFolder where SvelteKit keeps its intermediate files; two builds at once need two
 * @throws Advice with the end of the builder's output
 */
export async function buildInto(folder: string, kitFolder = '.svelte-kit'): Promise<void> {
  const hash = sourcesHash();
  rmSync(stampOf(folder), { force: true });
  const env = {
    ...process.env,
    NODE_ENV: 'production',
    RIVENMARK_BUILD_DIR: folder,
    RIVENMARK_KIT_DIR: kitFolder
  };
  await runQuietly('Building', process.execPath, [join(root, 'node_modules/vite/bin/vite.js'), 'build'], {
    env,
    cure: 'Correct what the message names, then start again.'
  });
  await bundleWorkers(folder);
  writeFileSync(stampOf(folder), hash);
}

/** The product's own build, made again when the sources changed. @returns its folder */
export async function ensureBuild(): Promise<string> {
  const folder = join(root, 'build');
  await withLock('build', async () => {
    if (builtFrom(folder) !== sourcesHash()) await buildInto(folder);
  });
  return folder;
}

if (resolve(process.argv[1] ?? '') === fileURLToPath(import.meta.url))
  runCommand(async () => {
    await withLock('build', () => buildInto(join(root, 'build')));
    return 0;
  });
