import { toleranceFor } from '$lib/core/formula';
import { DEFAULT_ELEMENTS } from '$lib/core/suggest';
import { ANALYSERS, groupDefaultsFormSchema } from '$lib/schema/group-defaults-form';
import { groupNameSchema } from '$lib/schema/member';
import { page } from '$lib/server/edge';
import { submit } from '$lib/server/form';
import { groupSettings, renameGroup, saveGroupDefaults } from '$lib/server/services/groups';
import type { Actions, PageServerLoad } from './$types';

export const load: PageServerLoad = ({ locals, params }) =>
  page(async () => ({
    // Read again rather than taken from the layout: after a save the form must show what is stored now.
    current: await groupSettings(locals.user, params.group),
    program: {
      elements: DEFAULT_ELEMENTS,
      tolerances: ANALYSERS.map((analyser) => ({ analyser, ...toleranceFor(analyser) }))
    }
  }));

export const actions: Actions = {
  rename: (event) =>
    submit(event, 'rename', groupNameSchema, ({ name }) => renameGroup(event.locals.user, event.params.group, name)),
  save: (event) =>
    submit(event, 'save', groupDefaultsFormSchema, (input) =>
      saveGroupDefaults(event.locals.user, event.params.group, input)
    )
};
