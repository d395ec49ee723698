import { invitationIdSchema, invitationSchema } from '$lib/schema/member';
import { page } from '$lib/server/edge';
import { submit } from '$lib/server/form';
import { invite, listInvitations, withdrawInvitation } from '$lib/server/services/invitations';
import { studiesToOpen } from '$lib/server/services/members';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, params }) =>
  page(async () => ({
    invitations: await listInvitations(locals.user, params.group),
    studies: await studiesToOpen(locals.user, params.group)
  }));

export const actions: Actions = {
  invite: (event) =>
    submit(event, 'invite', invitationSchema, async (input) => {
      await invite(event.locals.user, event.params.group, input);
      return { said: `An invitation to ${input.email} is on its way.` };
    }),
  withdraw: (event) =>
    submit(event, 'withdraw', invitationIdSchema, async ({ invitation }) => {
      await withdrawInvitation(event.locals.user, event.params.group, invitation);
      return { said: 'The invitation is withdrawn; its link no longer works.' };
    })
};
