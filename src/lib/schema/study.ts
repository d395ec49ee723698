import { z } from 'zod';

export const newStudySchema = z.object({
  groupId: z.uuid('Choose a group.'),
  name: z.string().trim().min(1, 'Give the study a name.').max(160),
  description: z.string().trim().max(4000).default('')
});

export const editStudySchema = z.object({
  name: z.string().trim().min(1, 'Give the study a name.').max(160),
  description: z.string().trim().max(4000).default(''),
  version: z.coerce.number().int().positive()
});

export const TREE_STATUSES = ['draft', 'in-review', 'changes-asked', 'approved'] as const;

/** Filters of the table of trees; they live in the URL. */
export const treeFilterSchema = z.object({
  status: z.enum(TREE_STATUSES).optional().catch(undefined),
  run: z.uuid().optional().catch(undefined),
  text: z.string().trim().max(80).optional().catch(undefined),
  sort: z.enum(['updated', 'mz', 'explained', 'name']).catch('updated')
});
export type TreeFilter = z.infer<typeof treeFilterSchema>;
