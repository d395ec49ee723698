import { CoreError } from '$lib/core/errors';
import { ServiceError } from '../errors';
import { log } from '../log';
import { buildTreesJob } from '../services/build-trees';
import { readRunJob } from '../services/read-run';
import { suggestJob } from '../services/suggest-tree';
import { MissingFile } from '../storage';
import { JobCancelled, JobLost, unforeseen, type JobContext, type JobFailure, type JobOutcome } from './job';
import type { JobKind } from './queue';

type Work = (context: JobContext) => Promise<unknown>;

const WORK: Record<Exclude<JobKind, 'mail'>, Work> = {
  'read-run': readRunJob,
  'build-trees': buildTreesJob,
  suggest: suggestJob
};

/** What to do about a core error that names no cure of its own. */
const CURES: Record<keyof typeof WORK, string> = {
  'read-run': 'Convert the original data to mzML again, and upload that file.',
  'build-trees': 'Choose other precursor ions, or read the run again.',
  suggest: 'Check the formula, the elements and the ion types in the settings of the tree, then start Suggest again.'
};

/** Adds where in the file it went wrong to the words of a core error. */
function placed(error: CoreError): string {
  const { byte, scan } = error.place;
  const where = [scan && `scan ${scan}`, byte !== null && `byte ${byte}`].filter(Boolean).join(', ');
  const sentence = error.message.replace(/\.$/, '');
  return where && !sentence.includes(`byte ${byte}`) ? `${sentence} (at ${where}).` : `${sentence}.`;
}

function failureOf(error: unknown, context: JobContext): JobFailure {
  const { kind } = context.job;
  if (error instanceof CoreError)
    return {
      code: error.code,
      message: placed(error),
      cure: error.cure ?? (kind === 'mail' ? null : CURES[kind]),
      again: false
    };
  if (error instanceof ServiceError)
    return { code: error.code, message: error.message, cure: error.cure, again: false };
  if (error instanceof MissingFile)
    return {
      code: 'gone',
      message: error.message,
      cure: 'Restore it from the backup, or upload it again.',
      again: false
    };
  log.error({ err: error, job: context.job.id, kind: context.job.kind }, 'job failed');
  return unforeseen(error);
}

/** Does the work of one job and says how it ended; never throws. */
export async function perform(context: JobContext): Promise<JobOutcome> {
  try {
    const { kind } = context.job;
    if (kind === 'mail') throw new RangeError('Mail is not sent from a worker thread.');
    return { kind: 'done', result: (await WORK[kind](context)) ?? null };
  } catch (error) {
    if (error instanceof JobLost) return { kind: 'lost' };
    if (
      error instanceof JobCancelled ||
      (error instanceof CoreError && error.code === 'cancelled') ||
      context.isCancelled()
    )
      return { kind: 'cancelled' };
    return { kind: 'failed', failure: failureOf(error, context) };
  }
}
