import { createHash } from 'node:crypto';
import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { root } from './root.mjs';

const FOLDERS = ['src', 'static'];
const FILES = ['package-lock.json', 'svelte.config.js', 'vite.config.ts', 'tsconfig.json'];
/** Not part of what is built. */
const APART = [/^src\/cli\//, /^src\/ops\/(?!build\.ts)/, /\.test\.ts$/];

function filesUnder(folder: string): string[] {
  if (!existsSync(join(root, folder))) return [];
  return readdirSync(join(root, folder), { withFileTypes: true }).flatMap((entry) => {
    const path = `${folder}/${entry.name}`;
    return entry.isDirectory() ? filesUnder(path) : [path];
  });
}

/** A hash over everything that the build reads: equal hash, equal build. */
export function sourcesHash(): string {
  const paths = [...FILES, ...FOLDERS.flatMap(filesUnder)].filter((path) => !APART.some((rule) => rule.test(path)));
  const hash = createHash('sha256');
  for (const path of paths.sort()) {
    hash.update(`${path}\0`).update(
      createHash('sha256')
        .update(readFileSync(join(root, path)))
        .digest()
    );
  }
  return hash.digest('hex');
}
