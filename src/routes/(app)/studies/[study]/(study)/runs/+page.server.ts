import { page } from '$lib/server/edge';
import { config } from '$lib/server/config';
import { listRuns } from '$lib/server/services/runs';
import type { PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, params, depends }) =>
  page(async () => {
    depends('study:runs');
    return { runs: await listRuns(locals.user, params.study), maxUpload: config().RIVENMARK_MAX_UPLOAD };
  });
