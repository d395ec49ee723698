import type { JobView } from '$lib/schema/run';

const EVERY = 700;
/** After a failed question, e.g. while the server restarts. */
const AFTER_FAILURE = 3000;

interface Refusal {
  error?: string;
}

export const isUnderWay = (job: Pick<JobView, 'state'>): boolean => job.state === 'queued' || job.state === 'running';

/** Asks the server about a job until it has ended. */
export class JobWatch {
  job: JobView;
  /** why the last act was refused. */
  refusal = $state<string | null>(null);
  private timer: ReturnType<typeof setTimeout> | null = null;

  constructor(
    first: JobView,
    private readonly settled: (job: JobView) => void
  ) {
    this.job = $state(first);
  }

  /** Call in an effect. @returns what ends the watching */
  start(): () => void {
    const ask = async (): Promise<void> => {
      if (!isUnderWay(this.job)) return;
      const pause = (await this.ask()) ? EVERY : AFTER_FAILURE;
      if (!isUnderWay(this.job)) this.settled(this.job);
      else if (this.timer !== null) this.timer = setTimeout(() => void ask(), pause);
    };
    this.timer = setTimeout(() => void ask(), EVERY);
    return () => {
      if (this.timer !== null) clearTimeout(this.timer);
      this.timer = null;
    };
  }

  private async ask(): Promise<boolean> {
    try {
      const response = await fetch(`/api/jobs/${this.job.id}`);
      if (response.ok) this.job = (await response.json()) as JobView;
      return response.ok;
    } catch {
      // The network is away; the next question will tell.
      return false;
    }
  }

  /** Asks for the end, or for another attempt. @returns whether the server agreed */
  async act(what: 'cancel' | 'retry'): Promise<boolean> {
    this.refusal = null;
    try {
      const response = await fetch(`/api/jobs/${this.job.id}/${what}`, { method: 'POST' });
      if (!response.ok) this.refusal = ((await response.json()) as Refusal).error ?? 'The server refused.';
    } catch {
      this.refusal = 'The server could not be reached. Try again.';
    }
    await this.ask();
    return this.refusal === null;
  }
}
