/** One way of reading, in a process of its own: `mzml-process <mode> <file>` prints what it took as JSON. */
import { isMainThread, parentPort, Worker, workerData } from 'node:worker_threads';
import { MODES, type Counted, type Mode } from './mzml-modes';

/** What one reading of a file took. */
export interface Taken extends Counted {
  /** ms of CPU in all threads, from the first byte to the last peak. */
  cpu: number;
  /** ms of wall time. */
  wall: number;
  /** highest resident memory of the process, MB (10^6 bytes). */
  rss: number;
}

const WORKERS = 2;

function inWorker(mode: Mode, path: string): Promise<Counted> {
  return new Promise((resolve, reject) => {
    const worker = new Worker(new URL(import.meta.url), { workerData: { mode, path } });
    worker.once('message', resolve);
    worker.once('error', reject);
  });
}

async function timed(work: () => Counted | Promise<Counted>): Promise<Taken> {
  const start = performance.now();
  const before = process.cpuUsage();
  const counted = await work();
  const { user, system } = process.cpuUsage(before);
  const rss = process.resourceUsage().maxRSS / 1000;
  return { ...counted, cpu: (user + system) / 1000, wall: performance.now() - start, rss };
}

if (isMainThread) {
  const [mode, path] = process.argv.slice(2);
  const taken =
    mode === 'two-workers'
      ? await timed(async () => (await Promise.all(Array.from({ length: WORKERS }, () => inWorker('full', path))))[0])
      : await timed(() => MODES[mode as Mode](path));
  process.stdout.write(JSON.stringify(taken));
} else {
  const { mode, path } = workerData as { mode: Mode; path: string };
  parentPort?.postMessage(await MODES[mode](path));
}
