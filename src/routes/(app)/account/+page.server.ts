import { changePasswordSchema, endSessionSchema, noInputSchema, profileSchema } from '$lib/schema/account';
import { setSessionCookie } from '$lib/server/auth/cookie';
import { page } from '$lib/server/edge';
import { submit } from '$lib/server/form';
import { changePassword, profile, renameSelf } from '$lib/server/services/accounts';
import { endOtherSessions, endOwnSession, listSessions } from '$lib/server/services/sessions';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals }) =>
  page(async () => ({
    place: 'Account',
    profile: await profile(locals.user),
    sessions: await listSessions(locals.user, locals.sessionId)
  }));

export const actions: Actions = {
  profile: (event) => submit(event, 'profile', profileSchema, ({ name }) => renameSelf(event.locals.user, name)),
  password: (event) =>
    submit(event, 'password', changePasswordSchema, async (input) => {
      const origin = {
        address: event.getClientAddress(),
        userAgent: event.request.headers.get('user-agent') ?? ''
      };
      const id = await changePassword(event.locals.user, input, origin);
      setSessionCookie(event.cookies, id);
      // The page is rendered in the same request and marks the session that has just replaced the old one.
      event.locals.sessionId = id;
    }),
  endSession: (event) =>
    submit(event, 'sessions', endSessionSchema, async ({ session }) => {
      await endOwnSession(event.locals.user, session);
      return { said: 'The session has ended.' };
    }),
  endOthers: (event) =>
    submit(event, 'sessions', noInputSchema, async () => {
      const ended = await endOtherSessions(event.locals.user, event.locals.sessionId);
      return { said: ended === 1 ? 'One other session has ended.' : `${ended} other sessions have ended.` };
    })
};
