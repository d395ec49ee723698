/** A process that does nothing but take jobs, so that a test can kill it. */
import { startJobs } from '$lib/server/jobs/runner';

startJobs();
