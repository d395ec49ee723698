import { redirect } from '@sveltejs/kit';
import { signInSchema } from '$lib/schema/account';
import { ownPath } from '$lib/schema/next-path';
import { setSessionCookie } from '$lib/server/auth/cookie';
import { submit } from '$lib/server/form';
import { signIn } from '$lib/server/services/accounts';
import { endSession } from '$lib/server/services/sessions';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, url }) => {
  if (locals.user) redirect(303, ownPath(url.searchParams.get('next')));
  return { next: ownPath(url.searchParams.get('next')), done: url.searchParams.get('done') };
};

export const actions: Actions = {
  default: async (event) => {
    const origin = {
      address: event.getClientAddress(),
      userAgent: event.request.headers.get('user-agent') ?? ''
    };
    return submit(event, 'sign-in', signInSchema, async (input) => {
      const id = await signIn(input, origin);
      // Whatever session the browser came with does not live on beside the new one.
      await endSession(event.locals.sessionId);
      setSessionCookie(event.cookies, id);
      redirect(303, ownPath(event.url.searchParams.get('next')));
    });
  }
};
