import { describe, expect, it } from 'vitest';
import { checkList, MAX_NAMED } from './checklist';
import type { RevisionContent } from './content';
import { sampleContent, sampleIon } from './sample';

function check(key: string, change: (content: RevisionContent) => void = () => {}) {
  const content = sampleContent();
  change(content);
  const found = checkList(content).find((c) => c.key === key);
  if (!found) throw new Error(`no check ${key}`);
  return found;
}

describe('checkList', () => {
  it('names an intense ion without a formula, relative to the base peak of its own spectrum', () => {
    expect(check('unexplained')).toMatchObject({ level: 'look', count: 1, ions: [{ id: 4, relative: 8 }] });
  });

  it('accepts a reason for an unexplained ion', () => {
    const found = check('unexplained', (c) => (c.ions[3].reason = 'electronic noise, one scan only'));
    expect(found).toMatchObject({ level: 'ok', count: 0 });
  });

  it('passes over precursor ions and isotope satellites', () => {
    const found = check('unexplained', (c) => {
      c.ions[3].flag = 'isotope';
      c.ions.push(sampleIon(8, { formula: null, state: 'open', isPrecursor: true }));
    });
    expect(found.count).toBe(0);
  });

  it('counts a rejected formula as no explanation', () => {
    expect(check('unexplained', (c) => (c.ions[1].state = 'rejected')).count).toBe(2);
  });

  it('asks for reasons for weaker open ions', () => {
    expect(check('open-without-reason', (c) => (c.ions[3].intensity = 20))).toMatchObject({ level: 'note', count: 1 });
  });

  it('finds claims beyond the window that holds at their m/z: 1 mDa at m/z 110 is 9.1 ppm, 10 ppm is wider', () => {
    expect(check('beyond-tolerance', (c) => (c.ions[2].errorPpm = 9.9)).count).toBe(0);
    expect(check('beyond-tolerance', (c) => (c.ions[2].errorPpm = -10.1)).count).toBe(1);
  });

  it('takes the absolute floor at low m/z: 1 mDa at m/z 50 is 20 ppm', () => {
    const at50 = (errorPpm: number) => (c: RevisionContent) => {
      c.ions[2] = sampleIon(3, { spectrum: 1, mz: 50, errorPpm });
    };
    expect(check('beyond-tolerance', at50(19)).count).toBe(0);
    expect(check('beyond-tolerance', at50(21)).count).toBe(1);
  });

  it('calls a formula ambiguous when its rival is less than ten times less likely', () => {
    expect(check('ambiguous', (c) => (c.ions[1].rival = { formula: 'C8H10O2', score: 9.1 - 2.31 })).count).toBe(0);
    expect(check('ambiguous', (c) => (c.ions[1].rival = { formula: 'C8H10O2', score: 9.1 - 2.3 })).count).toBe(1);
  });

  it('warns of unit resolution, of a low share and of a missing formula', () => {
    const poor = (c: RevisionContent) => {
      c.spectra[1].tolerance = { ppm: 10, mda: 400 };
      c.tree.explained = 0.69;
      c.tree.formula = null;
    };
    for (const key of ['unit-resolution', 'explained', 'formula']) {
      expect(check(key).level).toBe('ok');
      expect(check(key, poor).level).toBe('look');
    }
  });

  it('names at most a dozen ions and counts all, strongest first', () => {
    const found = check('unconfirmed', (c) => {
      for (let i = 0; i < 30; i++) c.ions.push(sampleIon(100 + i, { intensity: 100 + i, state: 'proposed' }));
    });
    expect([found.ions.length, found.count, found.ions[1].id]).toEqual([MAX_NAMED, 31, 129]);
  });

  it('puts what needs a look first and what is in order last', () => {
    const levels = checkList(sampleContent()).map((c) => ['look', 'note', 'ok'].indexOf(c.level));
    expect(levels).toEqual([...levels].sort());
  });
});
