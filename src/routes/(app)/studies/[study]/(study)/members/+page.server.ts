import { z } from 'zod';
import { newShareSchema } from '$lib/schema/review';
import { page } from '$lib/server/edge';
import { submit } from '$lib/server/form';
import { revokeShareLink, shareStudy, studyShareLinks } from '$lib/server/services/share';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, params }) =>
  page(async () => ({ links: await studyShareLinks(locals.user, params.study) }));

export const actions: Actions = {
  share: (event) =>
    submit(event, 'share', newShareSchema, async ({ days }) => {
      const { url } = await shareStudy(event.locals.user, event.params.study, days);
      return { url };
    }),
  revoke: (event) =>
    submit(event, 'revoke', z.object({ id: z.string().length(64) }), ({ id }) =>
      revokeShareLink(event.locals.user, event.params.study, id)
    )
};
