import { redirect } from '@sveltejs/kit';
import { ownPath } from '$lib/schema/next-path';
import { clearSessionCookie } from '$lib/server/auth/cookie';
import { endSession } from '$lib/server/services/sessions';
import type { Actions, PageServerLoad } from './$types';

// Signing out changes something, so following a link must not do it.
export const load: PageServerLoad = () => redirect(303, '/');

export const actions: Actions = {
  default: async ({ locals, cookies, request }) => {
    const next = (await request.formData()).get('next');
    await endSession(locals.sessionId);
    clearSessionCookie(cookies);
    redirect(303, ownPath(typeof next === 'string' ? next : null, '/sign-in?done=out'));
  }
};
