import { describe, expect, it } from 'vitest';
import type { ClaimConflict } from '$lib/schema/workbench';
import { agoText, conflictText, readConflicts } from './words';

const now = new Date('2026-12-01T12:00:00Z');
const conflict: ClaimConflict = {
  ...{ ionId: 4, mz: 204.1019, version: 3, state: 'confirmed', formula: 'C12H14NO2' },
  ...{ action: 'confirmed', who: 'Reviewer', at: '2026-12-01T11:57:40Z' }
};

describe('agoText', () => {
  it('counts in the largest fitting unit', () => {
    expect(agoText('2026-12-01T11:59:30Z', now)).toBe('just now');
    expect(agoText('2026-12-01T11:59:00Z', now)).toBe('one minute ago');
    expect(agoText('2026-12-01T09:00:00Z', now)).toBe('three hours ago');
    expect(agoText('2026-11-01T12:00:00Z', now)).toBe('30 days ago');
  });
});

describe('conflictText', () => {
  it('says who, what and when', () => {
    expect(conflictText(conflict, now)).toBe(
      'Reviewer confirmed C12H14NO2 on this ion two minutes ago (m/z 204.1019) – look again.'
    );
  });
  it('names a change without a decision', () => {
    expect(conflictText({ ...conflict, action: null, who: null, at: null }, now)).toMatch(/^Somebody changed the ion/);
  });
});

describe('readConflicts', () => {
  it('reads what the server sends and nothing else', () => {
    expect(readConflicts({ conflicts: [conflict] })).toEqual([conflict]);
    expect(readConflicts({ version: 3 })).toEqual([]);
  });
});
