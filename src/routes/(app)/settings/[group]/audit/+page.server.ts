import { auditQuerySchema } from '$lib/schema/member';
import { page, parse } from '$lib/server/edge';
import { auditPage } from '$lib/server/services/audit-log';
import type { PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, params, url }) =>
  page(async () => {
    const query = parse(auditQuerySchema, {
      page: url.searchParams.get('page') ?? '1',
      action: url.searchParams.get('action') || null
    });
    return { action: query.action, log: await auditPage(locals.user, params.group, query) };
  });
