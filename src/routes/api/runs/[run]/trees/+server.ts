import { buildTreesSchema } from '$lib/schema/run';
import { api, parseJson } from '$lib/server/edge';
import { startBuild } from '$lib/server/services/build-trees';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = (event) =>
  api(async () => ({
    jobId: await startBuild(event.locals.user, event.params.run, await parseJson(event, buildTreesSchema))
  }));
