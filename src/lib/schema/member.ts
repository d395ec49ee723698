import { z } from 'zod';
import { emailSchema } from './account';
import { roleSchema } from './group';

export const uuidSchema = z.uuid('This is not a known id.');

export const groupNameSchema = z.object({
  name: z
    .string()
    .trim()
    .min(2, 'Write a name with at least two characters.')
    .max(120, 'A name has at most 120 characters.')
    .refine((name) => !/\p{Cc}/u.test(name), 'A name cannot hold control characters.')
});

const studyIds = z.array(uuidSchema).max(500).default([]);

export const invitationSchema = z.object({ email: emailSchema, role: roleSchema, studyIds });
export type NewInvitation = z.infer<typeof invitationSchema>;

/** Names one invitation by the stored hash of its secret. */
export const invitationIdSchema = z.object({
  invitation: z.string().regex(/^[0-9a-f]{64}$/, 'This invitation is not known.')
});

/** The role somebody gets; `studyIds` counts for guests only: the studies opened to them. */
export const memberChangeSchema = z.object({ userId: uuidSchema, role: roleSchema, studyIds });
export type MemberChange = z.infer<typeof memberChangeSchema>;

export const memberIdSchema = z.object({ userId: uuidSchema });

export const auditQuerySchema = z.object({
  page: z.coerce.number().int().min(1).max(100_000).catch(1),
  action: z
    .string()
    .regex(/^[a-z0-9.-]{1,60}$/)
    .nullable()
    .catch(null)
});
export type AuditQuery = z.infer<typeof auditQuerySchema>;
