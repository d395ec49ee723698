import { redirect } from '@sveltejs/kit';
import { editStudySchema, treeFilterSchema } from '$lib/schema/study';
import { action, page, parse } from '$lib/server/edge';
import { listRuns } from '$lib/server/services/runs';
import { deleteStudy, editStudy, listTrees } from '$lib/server/services/studies';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, params, url }) =>
  page(async () => {
    const filter = treeFilterSchema.parse(Object.fromEntries(url.searchParams));
    const [trees, runs] = await Promise.all([
      listTrees(locals.user, params.study, filter),
      listRuns(locals.user, params.study)
    ]);
    return { filter, trees, runs: runs.map(({ id, fileName }) => ({ id, fileName })) };
  });

export const actions: Actions = {
  edit: async ({ locals, params, request }) => {
    const values = Object.fromEntries(await request.formData());
    return action(values, () => editStudy(locals.user, params.study, parse(editStudySchema, values)));
  },
  delete: async ({ locals, params }) => {
    const result = await action({}, async () => {
      await deleteStudy(locals.user, params.study);
      return { deleted: true };
    });
    if ('deleted' in result) redirect(303, '/studies');
    return result;
  }
};
