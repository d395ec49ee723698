import type { Role } from '../schema/group';

/** Everything that a person may be allowed to do. Named subject.verb; one table decides. */
export const ACTIONS = [
  'group.read',
  'group.edit',
  'member.manage',
  'audit.read',
  'study.read',
  'study.create',
  'study.edit',
  'study.delete',
  'study.share',
  'run.upload',
  'run.manage',
  'tree.build',
  'tree.edit',
  'claim.decide',
  'remark.write',
  'remark.resolve',
  'review.request',
  'review.decide',
  'report.draft',
  'report.approved'
] as const;
export type Action = (typeof ACTIONS)[number];

const READ: Action[] = ['group.read', 'study.read', 'report.approved'];
const ANNOTATE: Action[] = [
  ...READ,
  'study.create',
  'study.edit',
  'run.upload',
  'run.manage',
  'tree.build',
  'tree.edit',
  'claim.decide',
  'remark.write',
  'remark.resolve',
  'review.request',
  'report.draft'
];

/** What each role may do. A guest's `study.read` holds only for the studies opened to them (see auth/authorize.ts). */
export const PERMISSIONS: Readonly<Record<Role, ReadonlySet<Action>>> = {
  guest: new Set<Action>(['study.read', 'report.approved']),
  reviewer: new Set<Action>([...READ, 'remark.write', 'remark.resolve', 'review.decide', 'report.draft']),
  annotator: new Set<Action>(ANNOTATE),
  lead: new Set<Action>([
    ...ANNOTATE,
    'group.edit',
    'member.manage',
    'audit.read',
    'study.delete',
    'study.share',
    'review.decide'
  ])
};

/** @returns whether the role may do the action at all */
export const may = (role: Role, action: Action): boolean => PERMISSIONS[role].has(action);
