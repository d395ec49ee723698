import { spawn } from 'node:child_process';
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { loadedDemo, type DemoAccount } from './demo-stamp';
import { root } from './root.mjs';
import { Advice } from './run-quietly.mjs';

const WATCH = pathToFileURL(join(root, 'src/ops/end-with-parent.mjs')).href;

/** What the demo needs to know: the environment of the web server that is running. */
export type ServerEnv = NodeJS.ProcessEnv & { DATABASE_URL: string };

/**
 * Loads the demo through the running product unless it was loaded before.
 * @returns its accounts
 * @throws Advice when the loading process fails
 */
export async function ensureDemo(env: ServerEnv, signal?: AbortSignal): Promise<DemoAccount[]> {
  const there = await loadedDemo(env.DATABASE_URL);
  if (there) return there;
  const status = await new Promise<number | NodeJS.Signals>((done, fail) => {
    const child = spawn(process.execPath, ['--import', WATCH, '--import', 'tsx', join(root, 'src/ops/demo.ts')], {
      cwd: root,
      env,
      stdio: ['ignore', 'inherit', 'inherit', 'ipc'],
      detached: true,
      signal
    });
    child.once('error', fail);
    child.once('exit', (code, ended) => done(ended ?? code ?? 1));
  });
  const accounts = await loadedDemo(env.DATABASE_URL);
  if (status === 0 && accounts) return accounts;
  throw new Advice(`The demo was not loaded (${status}). The product works without it; the next start tries again.`);
}

/** Whether the project has a demo to load. */
export const hasDemo = () => existsSync(join(root, 'src/lib/server/demo/index.ts'));
