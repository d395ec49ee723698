/** A worker thread of the command: one task after the other. */
import { parentPort } from 'node:worker_threads';
import { perform, type Task } from './tasks';

const port = parentPort;
if (!port) throw new Error('This module runs in a worker thread only');
port.on('message', (task: Task) => {
  perform(task).then(
    (result) => port.postMessage(result),
    (error: unknown) => {
      // An error event in the main thread names the task that failed.
      setImmediate(() => {
        throw error;
      });
    }
  );
});
