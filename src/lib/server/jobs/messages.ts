import type { ClaimedJob, JobOutcome, JobProgress } from './job';

/** To a worker thread: one job at a time, or the wish to end. `flag` is shared memory: 1 asks the job to stop. */
export type ToWorker = { kind: 'work'; job: ClaimedJob; flag: SharedArrayBuffer } | { kind: 'close' };

/** From a worker thread: any number of progress notes, then exactly one outcome. */
export type FromWorker = { kind: 'progress'; progress: JobProgress } | { kind: 'outcome'; outcome: JobOutcome };
