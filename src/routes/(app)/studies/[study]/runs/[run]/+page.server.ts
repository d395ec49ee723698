import { redirect } from '@sveltejs/kit';
import { action, page } from '$lib/server/edge';
import { deleteRun, runPage } from '$lib/server/services/runs';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, params, depends }) =>
  page(async () => {
    depends('run:page');
    const shown = await runPage(locals.user, params.study, params.run);
    return { ...shown, place: shown.study.name };
  });

export const actions: Actions = {
  delete: ({ locals, params }) =>
    action({}, async () => {
      await deleteRun(locals.user, params.study, params.run);
      redirect(303, `/studies/${params.study}/runs`);
    })
};
