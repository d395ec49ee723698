import { api } from '$lib/server/edge';
import { cancelJob } from '$lib/server/services/jobs';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = ({ locals, params }) => api(() => cancelJob(locals.user, params.job));
