import { z } from 'zod';
import { CONFIDENCE_LEVELS } from './workbench';

export const REMARK_ANCHORS = ['tree', 'spectrum', 'ion', 'loss'] as const;
export type RemarkAnchor = (typeof REMARK_ANCHORS)[number];

const body = z
  .string()
  .trim()
  .min(1, 'Write something first.')
  .max(8000, 'A remark holds at most 8000 characters.')
  .refine((text) => text.isWellFormed(), 'The text holds broken characters.');

/** A new thread. An ion or loss names the ion's row id, a spectrum its index in the tree. */
export const newRemarkSchema = z.discriminatedUnion('anchor', [
  z.object({ anchor: z.literal('tree'), body }),
  z.object({ anchor: z.literal('spectrum'), spectrum: z.number().int().min(0), body }),
  z.object({ anchor: z.literal('ion'), ionId: z.number().int().positive(), body }),
  z.object({ anchor: z.literal('loss'), ionId: z.number().int().positive(), body })
]);
export type NewRemark = z.infer<typeof newRemarkSchema>;

export const replySchema = z.object({ body });
export const resolveSchema = z.object({ resolved: z.boolean() });

/** Filter of the threads of a tree; all parts are optional. */
export const remarkFilterSchema = z.object({
  anchor: z.enum(REMARK_ANCHORS).optional(),
  spectrum: z.coerce.number().int().min(0).optional(),
  ionId: z.coerce.number().int().positive().optional(),
  open: z
    .enum(['true', 'false'])
    .transform((value) => value === 'true')
    .optional()
});
export type RemarkFilter = z.infer<typeof remarkFilterSchema>;

export interface RemarkReply {
  id: string;
  author: string;
  /** whether the reader wrote it. */
  mine: boolean;
  body: string;
  createdAt: string;
}

/** A thread as people see it: the first remark with its replies. */
export interface RemarkThreadView extends RemarkReply {
  anchor: RemarkAnchor;
  spectrum: number | null;
  ionId: number | null;
  mz: number | null;
  /** formula of the ion and its loss as they stand now. */
  formula: string | null;
  loss: string | null;
  /** revision under review when it was written. */
  revisionNumber: number | null;
  resolvedAt: string | null;
  resolvedBy: string | null;
  replies: RemarkReply[];
}

export const askForReviewSchema = z.object({
  reviewers: z.array(z.uuid()).min(1, 'Name at least one reviewer.').max(20),
  message: z.string().trim().max(4000).default(''),
  /** version of the tree that the person looked at. */
  treeVersion: z.coerce.number().int().positive()
});
export type AskForReview = z.infer<typeof askForReviewSchema>;

export const verdictSchema = z.object({
  verdict: z.enum(['approve', 'ask-for-changes'], 'Choose a verdict.'),
  reason: z.string().trim().max(4000).default(''),
  revision: z.coerce.number().int().positive(),
  /** hash of the revision that the person looked at. */
  hash: z.string().regex(/^[0-9a-f]{64}$/, 'The hash of the revision is missing.')
});
export type VerdictInput = z.infer<typeof verdictSchema>;

export const withdrawSchema = z.object({ revision: z.coerce.number().int().positive() });

export const levelSchema = z.object({
  version: z.coerce.number().int().positive(),
  level: z.enum(['', ...CONFIDENCE_LEVELS])
});

export const newShareSchema = z.object({
  /** days until the link ends. */
  days: z.coerce.number().int().min(1, 'At least one day.').max(365, 'At most a year.').default(30)
});

/** The secret of a shared link: 32 random bytes in base64url. */
export const shareTokenSchema = z.string().regex(/^[A-Za-z0-9_-]{43}$/);

export interface ShareLinkView {
  id: string;
  treeId: string | null;
  treeName: string | null;
  createdBy: string | null;
  createdAt: string;
  expiresAt: string;
  state: 'open' | 'expired' | 'revoked';
}
