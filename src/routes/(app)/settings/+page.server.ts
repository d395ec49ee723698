import { redirect } from '@sveltejs/kit';
import { groupNameSchema } from '$lib/schema/member';
import { page } from '$lib/server/edge';
import { submit } from '$lib/server/form';
import { createGroup, myGroups } from '$lib/server/services/groups';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals }) => page(async () => ({ own: await myGroups(locals.user) }));

export const actions: Actions = {
  create: (event) =>
    submit(event, 'create', groupNameSchema, async ({ name }) => {
      redirect(303, `/settings/${await createGroup(event.locals.user, name)}`);
    })
};
