import { requireUser } from '$lib/server/auth/authorize';
import { page } from '$lib/server/edge';
import { jobsForDesk } from '$lib/server/services/jobs';
import { reviewQueue } from '$lib/server/services/review-queue';
import { listStudies } from '$lib/server/services/studies';
import { waitingForOthers } from '$lib/server/services/waiting';
import type { PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals }) =>
  page(async () => {
    const actor = requireUser(locals.user);
    const [queue, waiting, jobs, studies] = await Promise.all([
      reviewQueue(actor),
      waitingForOthers(actor),
      jobsForDesk(actor),
      listStudies(actor, 12)
    ]);
    return { queue, waiting, jobs, studies };
  });
