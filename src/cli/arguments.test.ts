import { describe, expect, it } from 'vitest';
import { CallError, HELP, readCall } from './arguments';

describe('readCall', () => {
  it('reads every option, values beginning with any sign included', () => {
    const call = readCall([
      'a.mzML',
      '--adduct',
      '[M-H]-',
      '--precursor-mz=304.15',
      '--formula',
      'C17H21NO4',
      '--elements',
      'C0-9H0-9',
      '--tolerance-ppm',
      '5',
      '--merge-energies',
      '--top',
      '3',
      'b.mzML'
    ]);
    expect(call.paths).toEqual(['a.mzML', 'b.mzML']);
    expect(call.options).toMatchObject({
      precursorMz: 304.15,
      mergeEnergies: true,
      suggest: {
        adducts: ['[M-H]-'],
        formula: 'C17H21NO4',
        elements: { C: [0, 9], H: [0, 9] },
        tolerance: { ppm: 5, mda: 0 },
        top: 3
      }
    });
  });

  it('has the documented defaults', () => {
    expect(readCall(['a.mzML']).options).toMatchObject({
      precursorMz: null,
      mergeEnergies: false,
      suggest: { adducts: [], formula: null, tolerance: null, top: 10 }
    });
  });

  it.each([
    [[], /No file/],
    [['a', '--top', '0'], /--top/],
    [['a', '--top', '2.5'], /--top/],
    [['a', '--top', '1', '--top', '2'], /2 times/],
    [['a', '--tolerance-ppm', '-5'], /above 0/],
    [['a', '--tolerance-mda', 'x'], /mDa/],
    [['a', '--precursor-mz', ''], /m\/z/],
    [['a', '--formula', 'C2Xx'], /--formula/],
    [['a', '--adduct', 'M'], /--adduct/],
    [['a', '--elements', 'C9-1'], /--elements/],
    [['a', '--colour'], /--colour/],
    [['a', '--top'], /--top/]
  ])('refuses %j in one line', (args, message) => {
    let error: unknown;
    try {
      readCall(args);
    } catch (reason) {
      error = reason;
    }
    expect(error).toBeInstanceOf(CallError);
    expect(String(error)).toMatch(message);
    expect(String(error)).not.toContain('\n');
  });

  it('explains every option', () => {
    expect(readCall(['--help']).help).toBe(true);
    for (const name of ['precursor-mz', 'adduct', 'formula', 'elements', 'tolerance-ppm', 'tolerance-mda', 'top']) {
      expect(HELP).toMatch(new RegExp(`--${name} [^]*?default: `));
    }
  });
});
