import { redirect } from '@sveltejs/kit';
import { may } from '$lib/review/permissions';
import { newStudySchema } from '$lib/schema/study';
import { database } from '$lib/server/db';
import { action, page, parse } from '$lib/server/edge';
import { createStudy, groupsOf, listStudies } from '$lib/server/services/studies';
import { requireUser } from '$lib/server/auth/authorize';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals }) =>
  page(async () => {
    const actor = requireUser(locals.user);
    const [studies, groups] = await Promise.all([listStudies(actor), groupsOf(database(), actor.id)]);
    return { studies, groups: groups.filter((group) => may(group.role, 'study.create')) };
  });

export const actions: Actions = {
  create: async ({ locals, request }) => {
    const values = Object.fromEntries(await request.formData());
    const result = await action(values, async () => ({
      id: await createStudy(locals.user, parse(newStudySchema, values))
    }));
    if ('id' in result) redirect(303, `/studies/${result.id}`);
    return result;
  }
};
