import { z } from 'zod';

export const ROLES = ['annotator', 'reviewer', 'lead', 'guest'] as const;
export const roleSchema = z.enum(ROLES);
export type Role = z.infer<typeof roleSchema>;

const window = z.object({
  ppm: z.number().min(0).max(1000),
  /** milli-dalton; the larger of the two windows is used at each m/z. */
  mda: z.number().min(0).max(1000)
});

/** What a new tree of the group starts from. Null means: the program's documented default. */
export const groupDefaultsSchema = z.object({
  tolerances: z.partialRecord(
    z.enum(['orbitrap', 'ft-icr', 'tof', 'quadrupole', 'ion-trap', 'sector', 'unknown']),
    window
  ),
  elements: z.string().max(200).nullable(),
  adducts: z.array(z.string().max(60)).max(40),
  /** reviewers whose approval a revision needs. */
  approvalsNeeded: z.number().int().min(1).max(5)
});
export type GroupDefaults = z.infer<typeof groupDefaultsSchema>;

export const initialGroupDefaults: GroupDefaults = { tolerances: {}, elements: null, adducts: [], approvalsNeeded: 1 };
