import { page } from '$lib/server/edge';
import { studyHead } from '$lib/server/services/studies';
import type { LayoutServerLoad } from './$types';

export const load: LayoutServerLoad = ({ locals, params }) =>
  page(async () => {
    const head = await studyHead(locals.user, params.study);
    return { ...head, place: head.group.name };
  });
