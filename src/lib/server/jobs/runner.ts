/** Starts taking jobs from the queue. */
export function startJobs(): void {}
/** Lets running jobs stop and waits for them. */
export async function stopJobs(): Promise<void> {}
