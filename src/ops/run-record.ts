import { existsSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { commandLine, endForeign } from './process';
import { Advice } from './run-quietly.mjs';

/** What a running product leaves in its data folder for the commands beside it; it holds a password. */
export interface RunRecord {
  /** process of start.ts */
  pid: number;
  /** process of the web server, 0 before it runs */
  serverPid: number;
  origin: string;
  databaseUrl: string;
}

const START = 'src/ops/start.ts';
/** How the processes of the web server are recognised, built or in development. */
const SERVER = ['build/index.js', 'vite.js'];

const pathOf = (data: string) => join(data, 'run.json');

function read(data: string): RunRecord | null {
  if (!existsSync(pathOf(data))) return null;
  try {
    return JSON.parse(readFileSync(pathOf(data), 'utf8')) as RunRecord;
  } catch {
    // Half-written by a killed process: it tells nothing.
    return null;
  }
}

/** The record of the product that runs on this data folder, or null. */
export function runningProduct(data: string): RunRecord | null {
  const record = read(data);
  return record && record.pid !== process.pid && commandLine(record.pid)?.includes(START) ? record : null;
}

/**
 * Makes sure that nothing else runs on the data folder. A web server that outlived a killed start is ended.
 * @throws Advice when a product runs there
 */
export async function claimFolder(data: string): Promise<void> {
  const running = runningProduct(data);
  if (running)
    throw new Advice(
      `Rivenmark already runs on ${data} (process ${running.pid}) at ${running.origin}.\n` +
        'Use that one, stop it with Ctrl-C, or set RIVENMARK_DATA to another folder.'
    );
  const stale = read(data);
  if (!stale) return;
  const mark = SERVER.find((part) => commandLine(stale.serverPid)?.includes(part));
  if (stale.serverPid > 1 && mark) await endForeign(stale.serverPid, mark);
  forgetRun(data);
}

export const recordRun = (data: string, record: RunRecord) =>
  writeFileSync(pathOf(data), JSON.stringify(record), { mode: 0o600 });

export const forgetRun = (data: string) => rmSync(pathOf(data), { force: true });
