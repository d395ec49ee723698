import { api } from '$lib/server/edge';
import { retryJob } from '$lib/server/services/jobs';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = ({ locals, params }) => api(() => retryJob(locals.user, params.job));
