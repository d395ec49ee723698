import type { Database } from '../db/connection';
import { log } from '../log';
import { isDatabaseAway, persist } from './database-away';
import { unforeseen, type ClaimedJob, type JobOutcome, type JobProgress } from './job';
import { newOwner, ownerIsDead } from './owner';
import { beat, cancelsAsked, claim, noteProgress, type JobKind } from './queue';
import { reap, settle } from './settle';
import type { JobThreads } from './threads';

/** A job silent for so many heartbeats counts as dead. */
const SILENT_BEATS = 5;
/** ms that a job has to answer when it is asked to stop. */
const GRACE = 3000;
const LONG: JobKind[] = ['read-run', 'build-trees', 'suggest'];

export interface RunnerOptions {
  /** jobs at once in worker threads. */
  workers: number;
  /** ms */
  heartbeat: number;
  threads: Pick<JobThreads, 'run' | 'kill' | 'close'>;
  /** sends one mail; a throw is a failure that is tried again. */
  mail: (job: ClaimedJob) => Promise<JobOutcome>;
}

interface Running {
  job: ClaimedJob;
  flag: SharedArrayBuffer;
  progress: JobProgress | null;
  asked: boolean;
  end: Promise<void>;
}

/** The runners of this process; more than one only in tests. */
const living = new Set<string>();

/** Takes jobs from the queue, says that they live, notices silent ones, and hands each to a thread. */
export class JobRunner {
  readonly owner = newOwner();
  private readonly running = new Map<string, Running>();
  private stopping = false;
  private loop: Promise<void> | null = null;
  private lastBeat = -Infinity;
  private away = false;
  private wake = () => {};

  constructor(
    private readonly db: Database,
    private readonly options: RunnerOptions
  ) {}

  start(): void {
    living.add(this.owner);
    this.loop ??= this.turn();
  }

  /** Asks running jobs to stop, waits, and puts them back into the queue. */
  async stop(): Promise<void> {
    this.stopping = true;
    this.wake();
    await this.loop;
    for (const { job } of this.running.values()) this.ask(job.id);
    await Promise.all([...this.running.values()].map(({ end }) => end));
    await this.options.threads.close();
    living.delete(this.owner);
  }

  private async turn(): Promise<void> {
    const pause = Math.min(400, this.options.heartbeat / 2);
    while (!this.stopping) {
      await this.round().then(
        () => this.back(),
        (error) => this.failed(error)
      );
      if (!this.stopping)
        await new Promise<void>((resolve) => {
          const timer = setTimeout(resolve, pause);
          this.wake = () => (clearTimeout(timer), resolve());
        });
    }
  }

  private back(): void {
    if (this.away) log.info('the database answers again; jobs go on');
    this.away = false;
  }

  private failed(error: unknown): void {
    if (!isDatabaseAway(error)) log.error({ err: error }, 'the job runner met an error and goes on');
    else if (!this.away) log.warn('the database does not answer; jobs wait for it');
    this.away = isDatabaseAway(error);
  }

  private async round(): Promise<void> {
    if (performance.now() - this.lastBeat >= this.options.heartbeat) {
      // First the sign of life, then the search for the dead: after an outage no process takes its own jobs for dead.
      await beat(this.db, this.owner, [...this.running.keys()]);
      const silence = SILENT_BEATS * this.options.heartbeat;
      await reap(this.db, silence, (owner) => ownerIsDead(owner, living), new Set(this.running.keys()));
      this.lastBeat = performance.now();
    }
    await this.notes();
    const long = () => [...this.running.values()].filter(({ job }) => job.kind !== 'mail').length;
    while (!this.stopping && long() < this.options.workers && (await this.take(LONG)));
    while (!this.stopping && this.running.size - long() < 1 && (await this.take(['mail'])));
  }

  /** Writes new progress, and passes on what people asked to cancel. */
  private async notes(): Promise<void> {
    for (const entry of this.running.values()) {
      const { progress, job } = entry;
      entry.progress = null;
      if (progress) await noteProgress(this.db, job, progress);
    }
    if (this.running.size) for (const id of await cancelsAsked(this.db, this.owner)) this.ask(id);
  }

  private async take(kinds: JobKind[]): Promise<boolean> {
    const job = await claim(this.db, this.owner, kinds);
    if (!job) return false;
    const entry: Running = {
      job,
      flag: new SharedArrayBuffer(4),
      progress: null,
      asked: false,
      end: Promise.resolve()
    };
    this.running.set(job.id, entry);
    entry.end = this.carry(entry);
    return true;
  }

  /** Sets the flag of a job; its thread is ended when it does not answer. */
  private ask(jobId: string): void {
    const entry = this.running.get(jobId);
    if (!entry || entry.asked) return;
    entry.asked = true;
    Atomics.store(new Int32Array(entry.flag), 0, 1);
    const timer = setTimeout(() => void this.options.threads.kill(jobId), GRACE);
    void entry.end.finally(() => clearTimeout(timer));
  }

  private async carry(entry: Running): Promise<void> {
    const { job, flag } = entry;
    const { threads, mail } = this.options;
    try {
      const work = () => (job.kind === 'mail' ? mail(job) : threads.run(job, flag, (note) => (entry.progress = note)));
      const ended = await work().catch((error: unknown): JobOutcome => {
        log.error({ err: error, job: job.id }, 'a job could not be started');
        return { kind: 'failed', failure: unforeseen(error) };
      });
      const outcome: JobOutcome = entry.asked && ended.kind === 'failed' ? { kind: 'cancelled' } : ended;
      // While stopping there is no time to wait for a database that is away: the next start finds the job silent.
      await persist(() => settle(this.db, job, outcome), { patience: Infinity, stopped: () => this.stopping });
    } catch (error) {
      log.error({ err: error, job: job.id }, 'the end of a job could not be written; it will be taken up again');
    } finally {
      this.running.delete(job.id);
      this.wake();
    }
  }
}
