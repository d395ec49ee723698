import { z } from 'zod';
import { reportOptions, reportQuery } from '$lib/review/report/options';
import { newShareSchema } from '$lib/schema/review';
import { page } from '$lib/server/edge';
import { submit } from '$lib/server/form';
import { reportOf } from '$lib/server/services/report';
import { listShareLinks, revokeShareLink, shareTree } from '$lib/server/services/share';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, params, url }) =>
  page(async () => {
    const options = reportOptions(url.searchParams);
    const { json: _, ...printed } = await reportOf(locals.user, params.tree, params.study, options);
    const links = printed.can.share ? await listShareLinks(locals.user, params.study, params.tree) : [];
    // Downloads name the revision that is shown, so that a page left open never prints another one.
    const shown = { ...options, revision: printed.report.source.revision ?? ('draft' as const) };
    return { ...printed, options, links, query: reportQuery(shown) };
  });

export const actions: Actions = {
  share: (event) =>
    submit(event, 'share', newShareSchema, async ({ days }) => {
      const { url } = await shareTree(event.locals.user, event.params.tree, event.params.study, days);
      return { url };
    }),
  revoke: (event) =>
    submit(event, 'revoke', z.object({ id: z.string().length(64) }), ({ id }) =>
      revokeShareLink(event.locals.user, event.params.study, id)
    )
};
