import { redirect } from '@sveltejs/kit';
import { acceptSchema, joinSchema } from '$lib/schema/account';
import { setSessionCookie } from '$lib/server/auth/cookie';
import { page } from '$lib/server/edge';
import { submit } from '$lib/server/form';
import { acceptAsMember, acceptAsNew, readInvitation } from '$lib/server/services/invitation-answer';
import { endSession } from '$lib/server/services/sessions';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ url, locals }) =>
  page(async () => {
    const token = url.searchParams.get('token') ?? '';
    return { token, viewer: locals.user?.email ?? null, offer: await readInvitation(token, locals.user) };
  });

export const actions: Actions = {
  join: (event) =>
    submit(event, 'join', joinSchema, async (input) => {
      const id = await acceptAsNew(input, event.request.headers.get('user-agent') ?? '');
      await endSession(event.locals.sessionId);
      setSessionCookie(event.cookies, id);
      redirect(303, '/');
    }),
  accept: (event) =>
    submit(event, 'accept', acceptSchema, async ({ token }) => {
      await acceptAsMember(event.locals.user, token);
      redirect(303, '/settings');
    })
};
