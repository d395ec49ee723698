import { replySchema, resolveSchema } from '$lib/schema/review';
import { api, parseJson } from '$lib/server/edge';
import { replyTo, resolveThread } from '$lib/server/services/remarks';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = (event) =>
  api(async () => replyTo(event.locals.user, event.params.remark, (await parseJson(event, replySchema)).body));

export const PATCH: RequestHandler = (event) =>
  api(async () =>
    resolveThread(event.locals.user, event.params.remark, (await parseJson(event, resolveSchema)).resolved)
  );
