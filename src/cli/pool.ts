/** Spreads tasks over worker threads on all cores; results come in the order of the tasks. */
import { availableParallelism } from 'node:os';
import { Worker } from 'node:worker_threads';
import { perform, type Result, type Task } from './tasks';

/** Below this many tasks a thread's start costs more than it saves. */
const WORTH_A_POOL = 2;

/** Workers run TypeScript through the same loader as this process, found from here and not from the working folder. */
function startWorker(): Worker {
  return new Worker(new URL('./worker-entry.mjs', import.meta.url));
}

/** Holds results until all earlier ones are there. */
class InOrder {
  private readonly waiting = new Map<number, Result>();
  private next = 0;

  constructor(private readonly emit: (result: Result) => void) {}

  add(index: number, result: Result): void {
    this.waiting.set(index, result);
    for (let ready = this.waiting.get(this.next); ready; ready = this.waiting.get(this.next)) {
      this.waiting.delete(this.next++);
      this.emit(ready);
    }
  }
}

/**
 * Performs tasks on as many threads as there are cores.
 * @param emit called with each result, in the order of `tasks`
 * @throws the error of a task that failed for no fault of its input
 */
export async function performAll(tasks: readonly Task[], emit: (result: Result) => void): Promise<void> {
  const threads = Math.min(availableParallelism(), tasks.length);
  if (tasks.length < WORTH_A_POOL || threads < 2) {
    for (const task of tasks) emit(await perform(task));
    return;
  }
  const order = new InOrder(emit);
  const workers = Array.from({ length: threads }, startWorker);
  let taken = 0;
  try {
    await Promise.all(
      workers.map(
        (worker) =>
          new Promise<void>((resolve, reject) => {
            let index = -1;
            const give = (): void => {
              if (taken >= tasks.length) return resolve();
              index = taken++;
              worker.postMessage(tasks[index]);
            };
            worker.on('message', (result: Result) => {
              order.add(index, result);
              give();
            });
            worker.on('error', reject);
            worker.on('exit', () => reject(new Error('A worker thread ended before its work was done')));
            give();
          })
      )
    );
  } finally {
    for (const worker of workers) worker.removeAllListeners('exit');
    await Promise.all(workers.map((worker) => worker.terminate()));
  }
}
