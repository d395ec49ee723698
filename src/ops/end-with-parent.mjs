/**
 * Loaded with --import into processes that must not outlive the one that started them: when the channel to it breaks,
 * as after a SIGKILL, the process ends itself the gentle way.
 */
import { isMainThread } from 'node:worker_threads';

const PATIENCE = 15_000;

if (isMainThread && process.channel) {
  process.once('disconnect', () => {
    process.kill(process.pid, 'SIGTERM');
    setTimeout(() => process.kill(process.pid, 'SIGKILL'), PATIENCE).unref();
  });
  process.channel.unref();
}
