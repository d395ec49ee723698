import { parentPort } from 'node:worker_threads';
import { config } from '../config';
import { connect } from '../db/connection';
import { fileStore } from '../storage';
import { jobContext, type JobProgress } from './job';
import type { FromWorker, ToWorker } from './messages';
import { perform } from './perform';

/** ms between two progress notes of one job. */
const PROGRESS_EVERY = 200;

const port = parentPort;
if (!port) throw new Error('This is the entry of a worker thread; it is started by the job runner.');

// Two connections: one for the transaction under way, one to read beside it.
const { db, pool } = connect(config().DATABASE_URL, 2);
const post = (message: FromWorker) => port.postMessage(message);

function progressNotes(): (progress: JobProgress) => void {
  let last = -Infinity;
  return (progress) => {
    const at = performance.now();
    if (at - last < PROGRESS_EVERY) return;
    last = at;
    post({ kind: 'progress', progress });
  };
}

port.on('message', async (message: ToWorker) => {
  if (message.kind === 'close') {
    await pool.end();
    port.close();
    return;
  }
  const flag = new Int32Array(message.flag);
  const context = jobContext({
    db,
    store: fileStore(),
    job: message.job,
    report: progressNotes(),
    isCancelled: () => Atomics.load(flag, 0) !== 0
  });
  post({ kind: 'outcome', outcome: await perform(context) });
});
