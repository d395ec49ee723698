import { z } from 'zod';
import { askForReviewSchema, levelSchema, verdictSchema, withdrawSchema } from '$lib/schema/review';
import { page } from '$lib/server/edge';
import { submit } from '$lib/server/form';
import { reviewPage } from '$lib/server/services/review-page';
import { askForReview, withdrawRevision } from '$lib/server/services/revisions';
import { editTree } from '$lib/server/services/tree-edit';
import { giveVerdict } from '$lib/server/services/verdicts';
import type { Actions, PageServerLoad } from './$types';

const choice = z.object({
  revision: z.coerce.number().int().positive().optional().catch(undefined),
  since: z.coerce.number().int().positive().optional().catch(undefined)
});

export const load: PageServerLoad = ({ locals, params, url }) =>
  page(() => reviewPage(locals.user, params.tree, params.study, choice.parse(Object.fromEntries(url.searchParams))));

export const actions: Actions = {
  ask: (event) =>
    submit(event, 'ask', askForReviewSchema, async (input) => {
      const { number } = await askForReview(event.locals.user, event.params.tree, input, event.params.study);
      return { said: `Revision ${number} is frozen and the reviewers were asked.` };
    }),
  verdict: (event) =>
    submit(event, 'verdict', verdictSchema, async (input) => {
      const { status } = await giveVerdict(event.locals.user, event.params.tree, input, event.params.study);
      const after = status === 'in-review' ? ' Further approvals are needed.' : '';
      return { said: `Your verdict on revision ${input.revision} is on record.${after}` };
    }),
  withdraw: (event) =>
    submit(event, 'withdraw', withdrawSchema, async ({ revision }) => {
      await withdrawRevision(event.locals.user, event.params.tree, revision, event.params.study);
      return { said: `Revision ${revision} was withdrawn.` };
    }),
  level: (event) =>
    submit(event, 'level', levelSchema, async ({ version, level }) => {
      const confidenceLevel = level === '' ? null : level;
      await editTree(event.locals.user, event.params.tree, { version, confidenceLevel });
      return { said: 'The confidence level is set.' };
    })
};
