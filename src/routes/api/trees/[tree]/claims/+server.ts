import { claimDecisionsSchema } from '$lib/schema/tree';
import { api, parseJson } from '$lib/server/edge';
import { decideClaims } from '$lib/server/services/claims';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = (event) =>
  api(async () => {
    const { decisions } = await parseJson(event, claimDecisionsSchema);
    return decideClaims(event.locals.user, event.params.tree, decisions);
  });
