import { describe, expect, it } from 'vitest';
import { sampleContent, sampleIon } from '../sample';
import { chargeText, COLUMNS, columnsOf } from './columns';
import { claimedConfidence } from './confidence';
import { csvField, reportCsv } from './csv';
import { methodsText } from './methods';
import { buildReport, type ReportSource } from './model';
import { reportOptions, reportQuery } from './options';

const source: ReportSource = {
  ...{ revision: 2, status: 'approved', hash: 'c'.repeat(64), at: '2026-01-02T00:00:00.000Z' },
  approvals: [{ name: 'Reviewer', at: '2026-01-03T00:00:00.000Z' }]
};
const options = (query = '') => reportOptions(new URLSearchParams(query));
const report = (query = '', change: Partial<ReportSource> = {}, content = sampleContent()) =>
  buildReport(content, { ...source, ...change }, options(query));

describe('reportOptions', () => {
  it('falls back on wrong values and survives the way through the URL', () => {
    expect(options('ions=everything&figure=pie&columns=x&revision=-3')).toEqual(options());
    const chosen = options('ions=all&figure=graph&columns=dbe&columns=found&revision=3');
    expect(chosen).toMatchObject({ ions: 'all', figure: 'graph', columns: ['found', 'dbe'], revision: 3 });
    expect(options(reportQuery(chosen).slice(1))).toEqual(chosen);
    expect(reportQuery(options())).toBe('');
  });
});

describe('buildReport', () => {
  it('lists explained ions by default, by stage and falling m/z', () => {
    expect(report().rows.map((r) => [r.level, r.found])).toEqual([
      [2, 195.0877],
      [2, 138.0662],
      [3, 110.0713]
    ]);
  });

  it('lists confirmed ions alone, or all', () => {
    expect(report('ions=confirmed').rows.map((r) => r.ionId)).toEqual([1, 2]);
    expect(report('ions=all').rows).toHaveLength(4);
    expect(report('ions=confirmed').leftOut).toBe(2);
  });

  it('gives intensities in percent of the base peak of their own spectrum', () => {
    expect(report().rows.map((r) => r.intensity)).toEqual([25, 100, 100]);
  });

  it('shows a rejected formula as no assignment', () => {
    const content = sampleContent();
    content.ions[1].state = 'rejected';
    const row = report('ions=all', {}, content).rows.find((r) => r.ionId === 2);
    expect(row).toMatchObject({ formula: null, calculated: null, errorPpm: null, loss: null, confirmedBy: null });
  });

  it.each(['draft', 'in-review', 'changes-asked', 'superseded', 'withdrawn'] as const)(
    'is a draft while %s',
    (status) => {
      expect(report('', { status }).draft).toBe(true);
    }
  );

  it('is no draft once approved', () => {
    expect(report()).toMatchObject({ draft: false, status: 'revision 2, approved' });
  });

  it('never says identified', () => {
    expect(JSON.stringify(report('ions=all'))).not.toMatch(/identified/i);
  });
});

describe('cells', () => {
  const cells = (key: string, change: Parameters<typeof sampleIon>[1] = {}) => {
    const content = sampleContent();
    content.ions = [sampleIon(1, change)];
    const built = report('ions=all', {}, content);
    return COLUMNS.find((c) => c.key === key)!.cell(built.rows[0], built);
  };

  it('signs errors with a true minus and never writes minus zero', () => {
    expect(cells('error', { errorPpm: -1.26 }).text).toBe('−1.3');
    expect(cells('error', { errorPpm: 1.26 }).text).toBe('+1.3');
    expect(cells('error', { errorPpm: -0.04 }).text).toBe('0.0');
  });

  it('raises charges, with a dot for radical ions', () => {
    expect(cells('formula', { oddElectron: true }).charge).toBe('•+');
    expect([chargeText(2), chargeText(-1), chargeText(-2, true)]).toEqual(['2+', '−', '•2−']);
  });

  it('prints the columns that were chosen, in the fixed order', () => {
    expect(columnsOf(report('columns=dbe&columns=stage')).map((c) => c.key)).toEqual(['stage', 'dbe']);
  });
});

describe('reportCsv', () => {
  it('has a header, a line for each ion, and ends lines with CRLF', () => {
    const lines = reportCsv(report()).split('\r\n');
    expect(lines).toHaveLength(5);
    expect(lines[0].split(',').slice(0, 4)).toEqual(['stage', 'isolated_mz', 'mz_found', 'ion_formula']);
    expect(lines[3]).toContain('3,195.0877 > 138.0662,110.0713,C5H8N3,1,even,110.071273,0.25');
  });

  it('quotes after RFC 4180 and disarms formulas, but leaves negative numbers alone', () => {
    expect(csvField('a "b", c')).toBe('"a ""b"", c"');
    expect(csvField('line\nbreak')).toBe('"line\nbreak"');
    expect(['=1+1', '+1', '-1', '@SUM(A1)', '\tx'].map(csvField)).toEqual(["'=1+1", "'+1", "'-1", "'@SUM(A1)", "'\tx"]);
    expect([csvField(-1.5), csvField(null)]).toEqual(['-1.5', '']);
  });

  it('disarms the name of a tree', () => {
    const content = sampleContent();
    content.tree.name = '=HYPERLINK("x")';
    expect(reportCsv(report('', {}, content))).toContain(`"'=HYPERLINK(""x"")"`);
  });
});

describe('claimedConfidence', () => {
  it('prints at most 2b for a tree', () => {
    expect(claimedConfidence('1')).toMatchObject({ level: '2b' });
    expect(claimedConfidence('2a').note).toContain('library spectrum');
    expect(claimedConfidence('4')).toMatchObject({ level: '4', note: null });
    expect(claimedConfidence(null).level).toBeNull();
  });
});

describe('methodsText', () => {
  it('is filled from run and settings', () => {
    const text = methodsText(sampleContent()).join(' ');
    for (const part of [
      'ESI, positive mode',
      'MS2: HCD',
      'MS3: CID',
      'isolation width 1 m/z',
      'elements CHNOPS',
      '91.4 %'
    ])
      expect(text).toContain(part);
    expect(text).toContain('2 claims were confirmed by Annotator');
  });

  it('says what the file does not state', () => {
    const content = sampleContent();
    content.run.instrument = null;
    content.spectra.forEach((s) => Object.assign(s, { energies: [], isolation: null }));
    const text = methodsText(content)[0];
    expect(text).toContain('collision energy not stated');
    expect(text).toContain('isolation width not stated');
    expect(text).toContain('an instrument that the file does not name');
  });
});
