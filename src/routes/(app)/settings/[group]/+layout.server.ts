import { page } from '$lib/server/edge';
import { groupSettings } from '$lib/server/services/groups';
import type { LayoutServerLoad } from './$types';

export const load: LayoutServerLoad = ({ locals, params }) =>
  page(async () => {
    const settings = await groupSettings(locals.user, params.group);
    return { settings, place: settings.name };
  });
