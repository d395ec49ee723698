import { redirect } from '@sveltejs/kit';
import { resetSchema } from '$lib/schema/account';
import { clearSessionCookie } from '$lib/server/auth/cookie';
import { page } from '$lib/server/edge';
import { submit } from '$lib/server/form';
import { readReset, resetPassword } from '$lib/server/services/password-reset';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ url }) =>
  page(async () => {
    const token = url.searchParams.get('token') ?? '';
    return { token, ...(await readReset(token)) };
  });

export const actions: Actions = {
  default: (event) =>
    submit(event, 'reset', resetSchema, async ({ token, password }) => {
      await resetPassword(token, password);
      clearSessionCookie(event.cookies);
      redirect(303, '/sign-in?done=reset');
    })
};
