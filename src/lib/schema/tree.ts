import { z } from 'zod';

/** Settings of one tree; null means the default by analyser, source and polarity. */
export const treeSettingsSchema = z.object({
  elements: z.string().max(200).nullable(),
  adducts: z.array(z.string().max(60)).max(40),
  tolerance: z.object({ ppm: z.number().min(0).max(1000), mda: z.number().min(0).max(1000) }).nullable(),
  separateEnergies: z.boolean()
});
export type TreeSettings = z.infer<typeof treeSettingsSchema>;

export const claimActionSchema = z.enum(['confirm', 'reject', 'open', 'undo']);

/** One decision on one ion; `version` is the version the person saw. */
export const claimDecisionSchema = z.object({
  ionId: z.number().int().positive(),
  version: z.number().int().positive(),
  action: claimActionSchema,
  /** ion formula to confirm; absent: the proposed one. */
  formula: z.string().max(120).optional(),
  reason: z.string().trim().max(2000).optional()
});
export type ClaimDecision = z.infer<typeof claimDecisionSchema>;

/** All or nothing. */
export const claimDecisionsSchema = z.object({ decisions: z.array(claimDecisionSchema).min(1).max(500) });
