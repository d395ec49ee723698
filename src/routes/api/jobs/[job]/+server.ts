import { api } from '$lib/server/edge';
import { readJob } from '$lib/server/services/jobs';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = ({ locals, params }) => api(() => readJob(locals.user, params.job));
