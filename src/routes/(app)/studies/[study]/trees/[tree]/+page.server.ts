import { page } from '$lib/server/edge';
import { workbenchHead } from '$lib/server/services/workbench';
import type { PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, params }) =>
  page(() => workbenchHead(locals.user, params.tree, params.study));
