import { redirect } from '@sveltejs/kit';
import { database } from '$lib/server/db';
import { groupsOf } from '$lib/server/services/studies';
import type { LayoutServerLoad } from './$types';

// Only the header's data. Each page and API handler authorises for itself: loads of a layout and its pages run together.
export const load: LayoutServerLoad = async ({ locals, url }) => {
  if (!locals.user) redirect(303, `/sign-in?next=${encodeURIComponent(url.pathname + url.search)}`);
  return { user: locals.user, groups: await groupsOf(database(), locals.user.id) };
};
