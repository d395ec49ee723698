import { describe, expect, it } from 'vitest';
import { ACTIONS, may, PERMISSIONS } from './permissions';
import { ROLES } from '../schema/group';

describe('permissions', () => {
  it('let a guest read and nothing else', () => {
    expect([...PERMISSIONS.guest].sort()).toEqual(['report.approved', 'study.read']);
  });

  it('keep claims from reviewers and verdicts from annotators', () => {
    expect(may('reviewer', 'claim.decide')).toBe(false);
    expect(may('reviewer', 'review.decide')).toBe(true);
    expect(may('annotator', 'claim.decide')).toBe(true);
    expect(may('annotator', 'review.decide')).toBe(false);
  });

  it('keep members, defaults, sharing and the audit log to the lead', () => {
    for (const action of ['member.manage', 'group.edit', 'audit.read', 'study.share', 'study.delete'] as const)
      expect(ROLES.filter((role) => may(role, action))).toEqual(['lead']);
  });

  it('leave no action that nobody may do', () => {
    for (const action of ACTIONS) expect(ROLES.some((role) => may(role, action))).toBe(true);
  });
});
