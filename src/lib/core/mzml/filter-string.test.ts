import { describe, expect, it } from 'vitest';
import { parseFilterString } from './filter-string';

describe('parseFilterString', () => {
  it('reads stages, activations and energies of an MS3 scan', () => {
    const filter = parseFilterString(
      'FTMS + p NSI sps d Full ms3 614.3303@cid35.00 498.1942@hcd65.00 [100.0000-500.0000]'
    );
    expect(filter).toEqual({
      analyser: 'orbitrap',
      polarity: 'positive',
      centroided: false,
      level: 3,
      path: [
        { mz: 614.3303, activations: ['CID'], energy: 35 },
        { mz: 498.1942, activations: ['HCD'], energy: 65 }
      ]
    });
  });

  it('reads the older form with double blanks and no analyser', () => {
    const filter = parseFilterString('+ c d Full ms2  445.35@cid35.00 [ 110.00-905.00]');
    expect(filter).toMatchObject({ analyser: null, centroided: true, level: 2, path: [{ mz: 445.35 }] });
  });

  it('reads several activations of one ion as one stage', () => {
    const { path } = parseFilterString('ITMS - c NSI r d Full ms2 700.5000@etd50.00@hcd20.00 [100.0-1400.0]');
    expect(path).toEqual([{ mz: 700.5, activations: ['ETD', 'HCD'], energy: 50 }]);
  });

  it('reads a survey scan', () => {
    expect(parseFilterString('FTMS - p ESI Full ms [100.00-1000.00]')).toMatchObject({
      polarity: 'negative',
      level: 1,
      path: []
    });
  });

  it('states nothing that is not there', () => {
    expect(parseFilterString('')).toEqual({ analyser: null, polarity: null, centroided: null, level: null, path: [] });
  });
});
