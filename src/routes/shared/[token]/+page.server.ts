import { page } from '$lib/server/edge';
import { openShared } from '$lib/server/services/share';
import type { PageServerLoad } from './$types';

export const load: PageServerLoad = ({ params, url, setHeaders }) => {
  setHeaders({ 'x-robots-tag': 'noindex, nofollow', 'cache-control': 'private, no-store' });
  return page(async () => ({ shared: await openShared(params.token, url.searchParams) }));
};
