import type { ChildProcess } from 'node:child_process';
import { readFileSync } from 'node:fs';

export const sleep = (ms: number) => new Promise<void>((done) => setTimeout(done, ms));

/** Command line of a living process, arguments joined by blanks, or null where there is none (also for zombies). */
export function commandLine(pid: number): string | null {
  try {
    const text = readFileSync(`/proc/${pid}/cmdline`, 'utf8').replaceAll('\0', ' ').trim();
    return text === '' ? null : text;
  } catch {
    return null;
  }
}

function signal(pid: number, name: NodeJS.Signals): void {
  try {
    process.kill(pid, name);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code !== 'ESRCH') throw error;
  }
}

/**
 * Ends a process that is not our child: SIGTERM, then SIGKILL after the deadline. Returns at once where the pid now
 * belongs to something else, recognised by `mark` missing from its command line.
 * @param patience ms until SIGKILL
 */
export async function endForeign(pid: number, mark: string, patience = 10_000): Promise<void> {
  const ours = () => commandLine(pid)?.includes(mark) ?? false;
  const until = async (ms: number) => {
    for (const end = Date.now() + ms; ours() && Date.now() < end;) await sleep(50);
  };
  if (!ours()) return;
  signal(pid, 'SIGTERM');
  await until(patience);
  if (!ours()) return;
  signal(pid, 'SIGKILL');
  await until(5_000);
  if (ours()) throw new Error(`Process ${pid} cannot be ended. End it with \`kill -9 ${pid}\` and start again.`);
}

/**
 * Ends a child process: SIGTERM, then SIGKILL after the deadline.
 * @param patience ms until SIGKILL
 * @returns whether it ended by itself, without SIGKILL
 */
export function endChild(child: ChildProcess, patience = 10_000): Promise<boolean> {
  return new Promise((done) => {
    if (child.exitCode !== null || child.signalCode !== null) return done(true);
    let gently = true;
    const timer = setTimeout(() => {
      gently = false;
      child.kill('SIGKILL');
    }, patience);
    child.once('exit', () => {
      clearTimeout(timer);
      done(gently);
    });
    child.kill('SIGTERM');
  });
}
