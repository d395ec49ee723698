import { spawn, type ChildProcess } from 'node:child_process';
import { closeSync, existsSync, openSync, readFileSync, renameSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { endChild, sleep } from './process';
import { root } from './root.mjs';
import { Advice } from './run-quietly.mjs';

const WATCH = pathToFileURL(join(root, 'src/ops/end-with-parent.mjs')).href;
/** ms */
const ANSWER_WITHIN = 120_000;
const STOP_WITHIN = 20_000;
/** bytes; a longer log is put aside at the next start */
const LONG_LOG = 20 * 1024 ** 2;

export interface WebServerOptions {
  /** folder of the build, or null for the development server with hot reload */
  build: string | null;
  host: string;
  port: number;
  /** the whole environment of the server, without HOST and PORT */
  env: NodeJS.ProcessEnv;
  /** file that takes its output; null: the terminal */
  log: string | null;
}

export interface WebServer {
  process: ChildProcess;
  /** settles when the process ends, with its status or signal */
  ended: Promise<number | NodeJS.Signals>;
  /** SIGTERM, then SIGKILL after 20 s */
  stop(): Promise<void>;
}

function openLog(path: string): number {
  if (existsSync(path) && statSync(path).size > LONG_LOG) renameSync(path, `${path}.1`);
  return openSync(path, 'a', 0o600);
}

function launch({ build, host, port, env, log }: WebServerOptions): ChildProcess {
  const entry = build
    ? [join(build, 'index.js')]
    : [join(root, 'node_modules/vite/bin/vite.js'), 'dev', '--host', host, '--port', String(port), '--strictPort'];
  const out = log ? openLog(log) : ('inherit' as const);
  const child = spawn(process.execPath, ['--import', WATCH, ...entry], {
    cwd: root,
    env: {
      ...env,
      NODE_ENV: build ? 'production' : 'development',
      HOST: host,
      PORT: String(port),
      BODY_SIZE_LIMIT: env.BODY_SIZE_LIMIT ?? '64M',
      SHUTDOWN_TIMEOUT: env.SHUTDOWN_TIMEOUT ?? '5'
    },
    stdio: ['ignore', out, out, 'ipc'],
    // Ctrl-C must reach it through us, so that the database outlives it.
    detached: true
  });
  if (typeof out === 'number') closeSync(out);
  return child;
}

async function answers(origin: string): Promise<boolean> {
  try {
    await fetch(origin, { redirect: 'manual', signal: AbortSignal.timeout(60_000) });
    return true;
  } catch {
    return false;
  }
}

const tailOf = (log: string | null) =>
  log && existsSync(log)
    ? `\nThe end of its log (${log}):\n${readFileSync(log, 'utf8').split('\n').slice(-15).join('\n')}`
    : '';

/**
 * Starts the web server as a child process and waits until it answers over HTTP.
 * @throws Advice with the end of its log when it ends or does not answer within two minutes
 */
export async function startWebServer(options: WebServerOptions): Promise<WebServer> {
  const child = launch(options);
  const state: { end: number | NodeJS.Signals | null } = { end: null };
  const ended = new Promise<number | NodeJS.Signals>((done) =>
    child.once('exit', (code, signal) => done((state.end = signal ?? code ?? 1)))
  );
  const origin = `http://${options.host === '0.0.0.0' ? '127.0.0.1' : options.host}:${options.port}/`;
  for (const late = Date.now() + ANSWER_WITHIN; state.end === null && !(await answers(origin)); await sleep(100)) {
    if (Date.now() < late) continue;
    child.kill('SIGKILL');
    await ended;
  }
  if (state.end !== null)
    throw new Advice(`The web server ended (${state.end}) before it answered at ${origin}.${tailOf(options.log)}`);
  return {
    process: child,
    ended,
    stop: async () => {
      await endChild(child, STOP_WITHIN);
    }
  };
}
