import { config } from '../config';
import { database } from '../db';
import { log } from '../log';
import { tidyUploads } from '../services/uploads';
import { isDatabaseAway } from './database-away';
import { JobRunner } from './job-runner';
import { sendMailOutcome } from './mail-work';
import { JobThreads } from './threads';

/** ms between two looks at transfers that nobody finished. */
const TIDY_EVERY = 60_000;

let runner: JobRunner | null = null;
let tidying: NodeJS.Timeout | null = null;

const tidy = () =>
  tidyUploads().catch((error: unknown) => {
    if (!isDatabaseAway(error)) log.error({ err: error }, 'old transfers could not be tidied');
  });

/** Starts taking jobs from the queue, unless this process is set to take none (RIVENMARK_WORKERS=0). */
export function startJobs(): void {
  const { RIVENMARK_WORKERS: workers, RIVENMARK_HEARTBEAT: heartbeat } = config();
  if (runner || workers === 0) return;
  runner = new JobRunner(database(), { workers, heartbeat, threads: new JobThreads(), mail: sendMailOutcome });
  runner.start();
  void tidy();
  tidying = setInterval(() => void tidy(), TIDY_EVERY);
}

/** Lets running jobs stop and waits for them; they go on at the next start. */
export async function stopJobs(): Promise<void> {
  if (tidying) clearInterval(tidying);
  const stopping = runner;
  runner = null;
  await stopping?.stop();
}
