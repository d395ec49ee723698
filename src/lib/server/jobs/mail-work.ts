import { ServiceError } from '../errors';
import { log } from '../log';
import { sendMailJob } from '../mail';
import type { ClaimedJob, JobOutcome } from './job';

/** Sends the mail of a job in the main thread: it waits for the network and computes nothing. */
export async function sendMailOutcome(job: ClaimedJob): Promise<JobOutcome> {
  try {
    await sendMailJob(job.input);
    return { kind: 'done', result: null };
  } catch (error) {
    if (error instanceof ServiceError)
      return { kind: 'failed', failure: { code: error.code, message: error.message, cure: error.cure, again: false } };
    log.warn({ err: error, job: job.id }, 'mail was not sent');
    const failure = {
      code: 'mail',
      message: 'The mail server did not take the mail.',
      cure: 'It is tried again; if it stays, the operator looks at the mail server.',
      again: true
    };
    return { kind: 'failed', failure };
  }
}
