import { join } from 'node:path';
import type { DemoAccount } from '../../src/ops/demo-stamp';
import { freePort } from '../../src/ops/free-port';
import { ensureDemo, type ServerEnv } from '../../src/ops/load-demo';
import { startMailCatcher } from '../../src/ops/mail-catcher';
import { ensureTestBuild } from '../../src/ops/test-folder';
import { startWebServer, type WebServer } from '../../src/ops/web-server';
import { openTestDatabase, type TestDatabase } from './database';

export interface ProductOptions {
  /** a database to serve; default: a fresh one that `stop` drops again */
  database?: TestDatabase;
  /** load the demo before the promise resolves */
  demo?: boolean;
  /** settings on top of the usual ones */
  env?: Record<string, string>;
}

export interface Product {
  /** http://127.0.0.1:port */
  origin: string;
  /** caught mails as JSON files */
  mailFolder: string;
  /** the environment of the web server: give it to services called from the test itself */
  env: ServerEnv;
  database: TestDatabase;
  /** accounts of the demo; empty without it */
  accounts: DemoAccount[];
  /** ends the web server alone, and waits until it has ended */
  kill(signal?: NodeJS.Signals): Promise<void>;
  /** starts the web server again on the same port, database and files */
  restart(): Promise<void>;
  stop(): Promise<void>;
}

/**
 * Starts the built product as its own process on a free port, with files and mails in a temporary folder, and waits
 * until it answers. `npm test` builds beforehand; run alone, this builds when the sources changed (about a minute).
 * @throws Advice with the end of the server's log when it does not start
 */
export async function startProduct(options: ProductOptions = {}): Promise<Product> {
  const build = process.env.RIVENMARK_TEST_BUILD ?? (await ensureTestBuild());
  const database = options.database ?? (await openTestDatabase());
  const catcher = await startMailCatcher(database.env.RIVENMARK_MAIL_FOLDER);
  const port = await freePort();
  const origin = `http://127.0.0.1:${port}`;
  const env: ServerEnv = {
    ...process.env,
    ...database.env,
    DATABASE_URL: database.url,
    ORIGIN: origin,
    SMTP_URL: catcher.url,
    ...options.env
  };
  const log = join(catcher.folder, '..', 'server.log');
  let server: WebServer | null = null;
  const start = async () => {
    server = await startWebServer({ build, host: '127.0.0.1', port, env, log });
  };
  const stop = async () => {
    await server?.stop();
    await catcher.stop();
    if (!options.database) await database.close();
  };
  const kill = async (signal: NodeJS.Signals = 'SIGTERM') => {
    server?.process.kill(signal);
    await server?.ended;
  };
  try {
    await start();
    const accounts = options.demo ? await ensureDemo(env) : [];
    return { origin, mailFolder: catcher.folder, env, database, accounts, kill, restart: start, stop };
  } catch (error) {
    await stop();
    throw error;
  }
}
