import { describe, expect, it } from 'vitest';
import { cv, mzmlText, readText } from '../../../../tests/helpers/mzml-text';

const codes = (warnings: { code: string }[]) => warnings.map((warning) => warning.code);

describe('metadata', () => {
  const ms2 = cv('MS:1000511', 2) + cv('MS:1000127');
  const scanList = (params: string, attributes = '') =>
    `<scanList count="1"><scan ${attributes}>${params}</scan></scanList>`;

  it('resolves parameter groups and the configuration of each scan', async () => {
    const head =
      `<referenceableParamGroupList><referenceableParamGroup id="g">${cv('MS:1000511', 2)}${cv('MS:1000129')}</referenceableParamGroup></referenceableParamGroupList>` +
      `<instrumentConfigurationList><instrumentConfiguration id="A"><componentList><source order="1">${cv('MS:1000070')}</source><analyzer order="2">${cv('MS:1000081')}</analyzer><analyzer order="3">${cv('MS:1000084')}</analyzer></componentList></instrumentConfiguration>` +
      `<instrumentConfiguration id="B"><componentList><analyzer order="1">${cv('MS:1000264')}</analyzer></componentList></instrumentConfiguration></instrumentConfigurationList>`;
    const params = '<referenceableParamGroupRef ref="g"/>';
    const { scans, summary } = await readText(
      mzmlText([{ params }, { params, inside: scanList('', 'instrumentConfigurationRef="B"') }], {
        head,
        run: 'defaultInstrumentConfigurationRef="A"'
      })
    );
    expect(scans.map((scan) => [scan.level, scan.polarity, scan.analyser])).toEqual([
      [2, 'negative', 'tof'],
      [2, 'negative', 'ion-trap']
    ]);
    expect(summary.info).toMatchObject({ ionSource: 'APCI', polarity: 'negative' });
  });

  it('reads times in minutes and seconds', async () => {
    const inside = [scanList(cv('MS:1000016', 2, 'UO:0000031')), scanList(cv('MS:1000016', 2, 'UO:0000010'))];
    const { scans } = await readText(mzmlText(inside.map((text) => ({ inside: text }))));
    expect(scans.map((scan) => scan.time)).toEqual([120, 2]);
  });

  it('reads a precursor with window, ion, charge, activation and energy', async () => {
    const inside =
      `<precursorList count="1"><precursor spectrumRef="scan=1"><isolationWindow>${cv('MS:1000827', 445.3)}${cv('MS:1000828', 0.5)}${cv('MS:1000829', 0.7)}<userParam name="ms level" value="1"/></isolationWindow>` +
      `<selectedIonList count="1"><selectedIon>${cv('MS:1000744', 445.34)}${cv('MS:1000041', 2)}${cv('MS:1000042', 120053)}</selectedIon></selectedIonList><activation>${cv('MS:1000422')}${cv('MS:1000045', 35, 'UO:0000266')}</activation></precursor></precursorList>`;
    const { scans } = await readText(mzmlText([{ params: ms2, inside }]));
    expect(scans[0].precursors).toEqual([
      {
        spectrumRef: 'scan=1',
        level: 1,
        isolation: { target: 445.3, lower: 0.5, upper: 0.7 },
        selectedMz: 445.34,
        charge: 2,
        intensity: 120053,
        activations: ['HCD'],
        energy: 35,
        energyUnit: 'eV'
      }
    ]);
  });

  it('takes stage, polarity, precursor and activation from a filter string in a userParam', async () => {
    const params =
      '<userParam name="filter string" value="ITMS - c ESI d Full ms3 500.10@cid35.00 300.20@hcd40.00 [80-500]"/>';
    const { scans } = await readText(mzmlText([{ params }]));
    expect(scans[0]).toMatchObject({ level: 3, polarity: 'negative', analyser: 'ion-trap' });
    expect(scans[0].precursors).toMatchObject([{ isolation: { target: 300.2 }, activations: ['HCD'], energy: 40 }]);
  });

  it('prefers the specific activation of the filter string to the general CID', async () => {
    const inside = `<precursorList><precursor><isolationWindow>${cv('MS:1000827', 300.2)}</isolationWindow><activation>${cv('MS:1000133')}</activation></precursor></precursorList>${scanList(cv('MS:1000512', 'FTMS + c ESI Full ms2 300.20@hcd40.00 [80-500]'))}`;
    const { scans } = await readText(mzmlText([{ params: ms2, inside }]));
    expect(scans[0].precursors[0].activations).toEqual(['HCD']);
  });

  it('passes over spectra of light and those of stage 0', async () => {
    const { scans, summary } = await readText(
      mzmlText([{ params: cv('MS:1000804') }, { params: cv('MS:1000511', 0) }, {}])
    );
    expect(scans.map((scan) => scan.id)).toEqual(['scan=3']);
    expect(summary.info.scans).toEqual({ '0': 1, '1': 1 });
    expect(summary.warnings).toMatchObject([{ code: 'not-mass-spectra', count: 2 }]);
  });

  it('takes charge 0 as unknown and keeps escapes of the id literal', async () => {
    const inside = `<precursorList><precursor><selectedIonList><selectedIon>${cv('MS:1000744', 300)}${cv('MS:1000041', 0)}</selectedIon></selectedIonList></precursor></precursorList>`;
    const { scans } = await readText(mzmlText([{ id: 'a_x0020_b &quot;&#956;&quot;', params: ms2, inside }]));
    expect(scans[0].precursors[0].charge).toBeNull();
    expect(scans[0].id).toBe('a_x0020_b "μ"');
  });

  it('centroids profile data and says so', async () => {
    const mz = Array.from({ length: 200 }, (_value, i) => 300 + i * 0.001);
    const intensity = mz.map((x) => 1000 * Math.exp(-((x - 300.1) ** 2) / (2 * 0.005 ** 2)));
    const text = mzmlText([{ params: cv('MS:1000511', 1) + cv('MS:1000128'), mz, intensity }]);
    const { scans, summary } = await readText(text);
    expect(scans[0]).toMatchObject({ centroided: true, centroidedHere: true, peakCount: 1 });
    expect(scans[0].peaks.mz[0]).toBeCloseTo(300.1, 5);
    expect(codes(summary.warnings)).toContain('centroided');
    const raw = await readText(text, { centroid: false });
    expect(raw.scans[0]).toMatchObject({ centroided: false, peakCount: 200 });
  });
});
