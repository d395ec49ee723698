import { describe, expect, it } from 'vitest';
import { diffRevisions, isSame } from './diff';
import { sampleContent, sampleIon } from './sample';

const remark = (id: string) => ({
  ...{ id, anchor: 'ion' as const, spectrum: 0, ionId: 2, mz: 138.0662 },
  ...{ author: 'Reviewer', at: '2026-01-01T00:00:00.000Z', body: 'Seen in MS3 as well?', replies: [] }
});

describe('diffRevisions', () => {
  it('finds nothing between equal revisions', () => {
    expect(isSame(diffRevisions(sampleContent(), sampleContent()))).toBe(true);
  });

  it('names a changed formula with the claim before and after', () => {
    const after = sampleContent();
    after.ions[2] = { ...after.ions[2], formula: 'C6H8NO', state: 'confirmed' };
    expect(diffRevisions(sampleContent(), after).ions).toEqual([
      {
        ...{ ionId: 3, spectrum: 1, mz: 110.0713, kind: 'formula' },
        before: { state: 'proposed', formula: 'C5H8N3' },
        after: { state: 'confirmed', formula: 'C6H8NO' }
      }
    ]);
  });

  it('names changed states and reasons, in the order of spectrum and m/z', () => {
    const after = sampleContent();
    after.ions[3] = { ...after.ions[3], reason: 'electronic noise' };
    after.ions[1] = { ...after.ions[1], state: 'rejected' };
    const kinds = diffRevisions(sampleContent(), after).ions.map((c) => [c.ionId, c.kind]);
    expect(kinds).toEqual([
      [2, 'state'],
      [4, 'reason']
    ]);
  });

  it('names ions that came and went', () => {
    const after = sampleContent();
    after.ions.splice(0, 1, sampleIon(9, { mz: 83.06 }));
    expect(diffRevisions(sampleContent(), after).ions.map((c) => [c.ionId, c.kind])).toEqual([
      [9, 'added'],
      [1, 'removed']
    ]);
  });

  it('names changed facts and settings in words', () => {
    const after = sampleContent();
    after.settings.tolerance = { ppm: 5, mda: 1 };
    after.tree.formula = 'C9H14N2O3';
    expect(diffRevisions(sampleContent(), after).facts).toEqual([
      { what: 'formula of the molecule', before: 'C8H10N4O2', after: 'C9H14N2O3' },
      { what: 'mass window', before: 'by analyser', after: '5 ppm, at least 1 mDa' }
    ]);
  });

  it('tells remarks opened from remarks settled', () => {
    const [before, after] = [sampleContent(), sampleContent()];
    before.remarks = [remark('a'), remark('b')];
    after.remarks = [remark('b'), remark('c')];
    const diff = diffRevisions(before, after);
    expect([diff.remarksOpened[0].id, diff.remarksClosed[0].id]).toEqual(['c', 'a']);
  });
});
