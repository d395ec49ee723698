import { existsSync } from 'node:fs';
import { dirname, resolve } from 'node:path';
import { Worker, type WorkerOptions } from 'node:worker_threads';
import { log } from '../log';
import type { ClaimedJob, JobOutcome, JobProgress } from './job';
import type { FromWorker, ToWorker } from './messages';

/** MB of JavaScript heap of one thread; a job that needs more ends its thread, never the server. */
const HEAP = 1536;

/** The bundled worker where this is a build, else its source through the TypeScript loader. */
function entry(env: NodeJS.ProcessEnv): { file: string; options: WorkerOptions } {
  const options: WorkerOptions = { env, resourceLimits: { maxOldGenerationSizeMb: HEAP } };
  if (import.meta.env?.PROD) {
    // Beside the server that runs: another build of the same checkout may lie in the usual place.
    const places = [
      resolve(dirname(process.argv[1] ?? '.'), 'workers/worker.mjs'),
      resolve('build/workers/worker.mjs')
    ];
    const file = places.find((place) => existsSync(place));
    if (!file) throw new Error(`The worker of this build is missing (${places.join(', ')}). Run \`npm run build\`.`);
    return { file, options: { ...options, execArgv: [] } };
  }
  return { file: resolve('src/lib/server/jobs/worker-entry.mjs'), options: { ...options, execArgv: [] } };
}

const CRASHED: JobOutcome = {
  kind: 'failed',
  failure: {
    code: 'worker-ended',
    message: 'The process that worked on this ended unexpectedly, perhaps for want of memory.',
    cure: 'Try again; if it stays, tell your operator.',
    again: true
  }
};

interface Thread {
  worker: Worker;
  /** set while a job runs. */
  finish: ((outcome: JobOutcome) => void) | null;
  progress: ((progress: JobProgress) => void) | null;
}

/** A few worker threads, started when first needed and kept, each doing one job at a time. */
export class JobThreads {
  private readonly idle: Thread[] = [];
  private readonly busy = new Map<string, Thread>();

  /** @param env environment of the threads; by default that of this process */
  constructor(private readonly env: NodeJS.ProcessEnv = process.env) {}

  private start(): Thread {
    const { file, options } = entry(this.env);
    const thread: Thread = { worker: new Worker(file, options), finish: null, progress: null };
    thread.worker.on('message', (message: FromWorker) => {
      if (message.kind === 'progress') thread.progress?.(message.progress);
      else thread.finish?.(message.outcome);
    });
    thread.worker.on('error', (error) => log.error({ err: error }, 'worker thread failed'));
    thread.worker.on('exit', () => {
      const at = this.idle.indexOf(thread);
      if (at >= 0) this.idle.splice(at, 1);
      thread.finish?.(CRASHED);
    });
    return thread;
  }

  /** Runs a job to its end; a thread that dies gives a failure. @param flag shared memory, set to 1 to ask the job to stop */
  async run(
    job: ClaimedJob,
    flag: SharedArrayBuffer,
    onProgress: (progress: JobProgress) => void
  ): Promise<JobOutcome> {
    const thread = this.idle.pop() ?? this.start();
    this.busy.set(job.id, thread);
    return new Promise((done) => {
      thread.progress = onProgress;
      thread.finish = (outcome) => {
        thread.finish = thread.progress = null;
        this.busy.delete(job.id);
        if (outcome !== CRASHED) this.idle.push(thread);
        done(outcome);
      };
      thread.worker.postMessage({ kind: 'work', job, flag } satisfies ToWorker);
    });
  }

  /** Ends the thread of a job that does not answer. */
  async kill(jobId: string): Promise<void> {
    await this.busy.get(jobId)?.worker.terminate();
  }

  /** Ends all threads: the idle ones in order, the others at once. */
  async close(): Promise<void> {
    const ending = this.idle.splice(0).map(async ({ worker }) => {
      const gone = new Promise<void>((resolve) => worker.once('exit', () => resolve()));
      worker.postMessage({ kind: 'close' } satisfies ToWorker);
      const timer = setTimeout(() => void worker.terminate(), 2000);
      await gone;
      clearTimeout(timer);
    });
    for (const { worker } of this.busy.values()) ending.push(worker.terminate().then(() => undefined));
    await Promise.all(ending);
  }
}
