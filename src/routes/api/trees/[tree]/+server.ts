import { treePatchSchema } from '$lib/schema/workbench';
import { api, parseJson } from '$lib/server/edge';
import { editTree } from '$lib/server/services/tree-edit';
import { workbenchView } from '$lib/server/services/workbench';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = ({ locals, params }) => api(() => workbenchView(locals.user, params.tree));

export const PATCH: RequestHandler = (event) =>
  api(async () => editTree(event.locals.user, event.params.tree, await parseJson(event, treePatchSchema)));
