import { redirect } from '@sveltejs/kit';
import { may } from '$lib/review/permissions';
import { noInputSchema } from '$lib/schema/account';
import { memberChangeSchema, memberIdSchema } from '$lib/schema/member';
import { page } from '$lib/server/edge';
import { submit } from '$lib/server/form';
import { groupSettings } from '$lib/server/services/groups';
import { changeMember, leaveGroup, listMembers, removeMember, studiesToOpen } from '$lib/server/services/members';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, params }) =>
  page(async () => {
    const { role } = await groupSettings(locals.user, params.group);
    return {
      self: locals.user?.id ?? '',
      members: await listMembers(locals.user, params.group),
      studies: may(role, 'member.manage') ? await studiesToOpen(locals.user, params.group) : []
    };
  });

export const actions: Actions = {
  change: (event) =>
    submit(event, 'change', memberChangeSchema, async (input) => {
      await changeMember(event.locals.user, event.params.group, input);
      return { userId: input.userId, said: 'The role is changed.' };
    }),
  remove: (event) =>
    submit(event, 'change', memberIdSchema, async ({ userId }) => {
      await removeMember(event.locals.user, event.params.group, userId);
      return { userId, said: 'The member was taken out of the group. What they wrote stays.' };
    }),
  leave: (event) =>
    submit(event, 'leave', noInputSchema, async () => {
      await leaveGroup(event.locals.user, event.params.group);
      redirect(303, '/settings');
    })
};
