import { XMLParser, XMLValidator } from 'fast-xml-parser';
import { describe, expect, it } from 'vitest';
import type { RevisionContent } from '../content';
import { sampleContent, sampleIon } from '../sample';
import { ticks } from './cascade';
import { figureSvg } from './figure';
import { layoutGraph } from './graph-layout';
import { placeLabels } from './labels';
import { buildReport, type ReportSource } from './model';
import { reportOptions } from './options';
import { formulaAt, formulaWidth } from './svg';

const source: ReportSource = { revision: 1, status: 'approved', hash: 'd'.repeat(64), approvals: [], at: '2026-01-01' };
const reportOf = (query: string, content: RevisionContent) =>
  buildReport(content, source, reportOptions(new URLSearchParams(query)));
const draw = (query: string, content = sampleContent()) => figureSvg(reportOf(query, content));

describe.each(['figure=cascade', 'figure=graph'])('%s', (query) => {
  it('is well-formed XML whatever the tree is called', () => {
    const content = sampleContent();
    content.tree.name = '<script>"&\'\u0001';
    expect(XMLValidator.validate(draw(query, content))).toBe(true);
    expect(draw(query, content)).not.toContain('<script');
  });

  it('names the ion formulas, piece by piece', () => {
    const parsed: unknown = new XMLParser({ ignoreAttributes: true }).parse(draw(query));
    expect(JSON.stringify(parsed)).toContain('138.0662');
  });

  it('is drawn for a tree without any explained ion', () => {
    const content = sampleContent();
    content.ions = [];
    expect(XMLValidator.validate(draw(query, content))).toBe(true);
  });

  it('holds no script, no link and no outside reference', () => {
    expect(draw(query)).not.toMatch(/<script|href|url\(|@import|on\w+=/i);
  });
});

describe('cascade', () => {
  it('draws one connector for each spectrum below MS2', () => {
    const heads = draw('figure=cascade').split('h9l-4.5 7z').length - 1;
    expect(heads).toBe(1 + 1); // one in the legend
  });

  it('draws states by shape: two confirmed sticks and the legend are full circles', () => {
    expect(draw('').split('r="3.6"').length - 1).toBe(3);
    expect(draw('').split('r="3.2"').length - 1).toBe(2);
  });
});

describe('graph', () => {
  const dashed = (svg: string) => svg.split('stroke-dasharray').length - 1;

  it('draws measured and inferred links differently', () => {
    const content = sampleContent();
    expect(dashed(draw('figure=graph', content))).toBe(1); // the legend's
    content.ions[1].link = 'inferred';
    expect(dashed(draw('figure=graph', content))).toBe(2);
  });

  it('merges the same formula of several spectra and keeps the measured link', () => {
    const content = sampleContent();
    content.ions.push(sampleIon(9, { spectrum: 1, intensity: 10, link: 'inferred' }));
    const { nodes, edges } = layoutGraph(reportOf('', content).rows);
    expect([nodes.length, edges.length, edges.every((e) => e.measured)]).toEqual([3, 2, true]);
  });

  it('puts an ion to the right of the ion it came from', () => {
    const { edges } = layoutGraph(reportOf('', sampleContent()).rows);
    expect(edges.map((e) => e.to.column - e.from.column)).toEqual([1, 1]);
  });

  it('keeps at most thirty ions and says how many it left out', () => {
    const content = sampleContent();
    for (let i = 0; i < 60; i++)
      content.ions.push(sampleIon(100 + i, { formula: `C${i + 20}H8`, mz: 60 + i, state: 'proposed', intensity: i }));
    const { nodes, leftOut } = layoutGraph(reportOf('', content).rows);
    expect([nodes.length, leftOut]).toEqual([30, 33]);
    expect(draw('figure=graph', content)).toContain('33 weaker formulas');
  });
});

describe('placeLabels', () => {
  const label = (x: number) => ({ x, bottom: 50, width: 50, height: 12 });

  it('keeps the first and drops what has no room', () => {
    expect(placeLabels([label(100), label(101), label(200)], 0, 400)).toEqual([100, null, 200]);
  });

  it('pushes a label sideways, but never off its stick', () => {
    const [first, second] = placeLabels([label(100), label(135)], 0, 400);
    expect(first).toBe(100);
    expect(second).toBeGreaterThanOrEqual(154);
    expect(second).toBeLessThanOrEqual(160);
  });

  it('stays inside the frame and off obstacles', () => {
    expect(placeLabels([label(5)], 0, 400)).toEqual([25]);
    expect(placeLabels([label(100)], 0, 400, [{ left: 60, right: 140, top: 0, bottom: 100 }])).toEqual([null]);
  });
});

describe('drawing helpers', () => {
  it('raises the charge and lowers the counts', () => {
    const ys = [...formulaAt(0, 100, 'C6H8', { size: 10, charge: '+' }).matchAll(/y="([\d.]+)"/g)].map((m) =>
      Number(m[1])
    );
    expect(ys).toEqual([100, 102, 100, 102, 96.6]);
  });

  it('counts small characters small', () => {
    expect(formulaWidth('C6', 10)).toBeCloseTo(6 + 6 * 0.72, 6);
  });

  it('sets ticks at round numbers', () => {
    expect(ticks(52, 361)).toEqual([100, 150, 200, 250, 300, 350]);
  });
});
