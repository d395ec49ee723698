import { api } from '$lib/server/edge';
import { startSuggest } from '$lib/server/services/suggest-tree';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = ({ locals, params }) =>
  api(async () => ({ jobId: await startSuggest(locals.user, params.tree) }));
