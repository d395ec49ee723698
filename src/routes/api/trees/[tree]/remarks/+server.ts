import { newRemarkSchema, remarkFilterSchema } from '$lib/schema/review';
import { api, parse, parseJson } from '$lib/server/edge';
import { listThreads, writeRemark } from '$lib/server/services/remarks';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = ({ locals, params, url }) =>
  api(() => listThreads(locals.user, params.tree, parse(remarkFilterSchema, Object.fromEntries(url.searchParams))));

export const POST: RequestHandler = (event) =>
  api(async () => writeRemark(event.locals.user, event.params.tree, await parseJson(event, newRemarkSchema)));
