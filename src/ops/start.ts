/** `npm start` and `npm run dev`, once the packages are there: database, build, mail catcher, web server, demo. */
import { mkdirSync } from 'node:fs';
import { join } from 'node:path';
import { runCommand } from './bootstrap.mjs';
import { ensureBuild } from './build';
import type { DemoAccount } from './demo-stamp';
import { nextFreePort, portIsFree } from './free-port';
import { ensureDemo, hasDemo, type ServerEnv } from './load-demo';
import { startMailCatcher } from './mail-catcher';
import { startMariadb } from './mariadb';
import { migrateDatabase } from './migrate';
import { claimFolder, forgetRun, recordRun } from './run-record';
import { Advice, say } from './run-quietly.mjs';
import { filesFolder, readSettings, type Settings } from './settings';
import { startWebServer } from './web-server';

/** What was started, to be stopped in the opposite order. */
const undo: { what: string | null; stop: () => Promise<void> }[] = [];
const stopping = new AbortController();
/** Something that must not end while we run, and did. */
let report: (what: string) => void;
const lost = new Promise<string>((done) => (report = done));

async function stopAll(): Promise<void> {
  for (const { what, stop } of undo.splice(0).reverse()) {
    if (what) say(`Stopping ${what} …`);
    await stop();
  }
}

async function startDatabase(settings: Settings): Promise<string> {
  if (settings.databaseUrl) {
    say('Using the database of DATABASE_URL');
    return settings.databaseUrl;
  }
  say('Starting MariaDB …');
  const mariadb = await startMariadb({ folder: join(settings.data, 'mariadb') });
  undo.push({ what: 'MariaDB', stop: mariadb.stop });
  void mariadb.ended.then(() => report(`MariaDB ended. Its log: ${join(settings.data, 'mariadb/mariadb.log')}`));
  say(`  ready on 127.0.0.1:${mariadb.port}`);
  return mariadb.url;
}

async function choosePort(settings: Settings): Promise<number> {
  if (!settings.portIsFixed) return nextFreePort(settings.port);
  if (await portIsFree(settings.port)) return settings.port;
  throw new Advice(`Port ${settings.port} is taken. Set RIVENMARK_PORT to a free one, or unset it, and start again.`);
}

async function mailSettings(settings: Settings): Promise<Record<string, string>> {
  if (process.env.SMTP_URL) return { SMTP_URL: process.env.SMTP_URL };
  const catcher = await startMailCatcher(join(settings.data, 'mail'));
  undo.push({ what: 'the mail catcher', stop: catcher.stop });
  return { SMTP_URL: catcher.url, RIVENMARK_MAIL_FOLDER: catcher.folder };
}

async function serve(settings: Settings, databaseUrl: string): Promise<ServerEnv> {
  const build = settings.dev ? null : await ensureBuild();
  const port = await choosePort(settings);
  const files = filesFolder(settings, process.env);
  mkdirSync(files, { recursive: true, mode: 0o700 });
  const env: ServerEnv = {
    ...process.env,
    ...(await mailSettings(settings)),
    DATABASE_URL: databaseUrl,
    RIVENMARK_FILES: files,
    ORIGIN: process.env.ORIGIN || `http://127.0.0.1:${port}`
  };
  const log = settings.dev ? null : join(settings.data, 'server.log');
  say(`Starting the web server …${log ? ` (its log: ${log})` : ''}`);
  const server = await startWebServer({ build, host: settings.host, port, env, log });
  undo.push({ what: 'the web server', stop: server.stop });
  void server.ended.then((end) => report(`The web server ended (${end}).${log ? ` Its log: ${log}` : ''}`));
  recordRun(settings.data, {
    pid: process.pid,
    serverPid: server.process.pid ?? 0,
    origin: env.ORIGIN ?? '',
    databaseUrl
  });
  return env;
}

async function demo(settings: Settings, env: ServerEnv): Promise<DemoAccount[]> {
  if (!settings.demo || !hasDemo()) return [];
  try {
    return await ensureDemo(env, stopping.signal);
  } catch (error) {
    if (!(error instanceof Advice)) throw error;
    say(error.message);
    return [];
  }
}

function welcome(env: ServerEnv, accounts: readonly DemoAccount[]): void {
  const lines = ['', `Rivenmark is ready at ${env.ORIGIN}`];
  if (accounts.length > 0) {
    const width = Math.max(...accounts.map(({ email }) => email.length));
    const rows = accounts.map(({ name, email, password }) => `  ${email.padEnd(width)}  ${password}  ${name}`);
    lines.push('', 'Accounts of the demo (address, password, who):', ...rows);
  }
  if (env.RIVENMARK_MAIL_FOLDER)
    lines.push('', `No mail server is set: mails are caught and shown at ${env.ORIGIN}/dev/mail`);
  say([...lines, '', 'Stop with Ctrl-C.', ''].join('\n'));
}

async function run(): Promise<number> {
  const settings = readSettings(process.env, process.argv.slice(2));
  mkdirSync(settings.data, { recursive: true, mode: 0o700 });
  await claimFolder(settings.data);
  recordRun(settings.data, { pid: process.pid, serverPid: 0, origin: 'an address to come', databaseUrl: '' });
  undo.push({ what: null, stop: async () => forgetRun(settings.data) });
  const databaseUrl = await startDatabase(settings);
  if (stopping.signal.aborted) return 0;
  say('Migrating the database …');
  await migrateDatabase(databaseUrl);
  if (stopping.signal.aborted) return 0;
  const env = await serve(settings, databaseUrl);
  if (stopping.signal.aborted) return 0;
  welcome(env, await demo(settings, env));
  const signalled = new Promise<null>((done) => {
    if (stopping.signal.aborted) done(null);
    stopping.signal.addEventListener('abort', () => done(null));
  });
  const failure = await Promise.race([signalled, lost]);
  if (failure === null) return 0;
  say(`\n${failure}\nEverything is stopped now. Look at the log, then start again.`);
  return 1;
}

for (const name of ['SIGINT', 'SIGTERM', 'SIGHUP'] as const) process.on(name, () => stopping.abort());

runCommand(async () => {
  try {
    return await run();
  } catch (error) {
    if (!stopping.signal.aborted) throw error;
    return 0;
  } finally {
    await stopAll();
    // The channel to the starting process would keep this one alive.
    if (process.connected) process.disconnect();
  }
});
