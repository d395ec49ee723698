import { forgotSchema } from '$lib/schema/account';
import { submit } from '$lib/server/form';
import { requestReset } from '$lib/server/services/password-reset';
import type { Actions } from './$types';

export const actions: Actions = {
  default: (event) =>
    submit(event, 'forgot', forgotSchema, async ({ email }) => {
      await requestReset(email, event.getClientAddress());
      return { email };
    })
};
