import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import type { RevisionContent } from '$lib/review/content';
import { figureSvg } from '$lib/review/report/figure';
import { reportOptions } from '$lib/review/report/options';
import { closeDatabase } from '$lib/server/db';
import { fileName, reportDownload, reportFile, type ReportFile } from '$lib/server/report/files';
import { reportDocument } from '$lib/server/report/pdf-document';
import { decideClaims } from '$lib/server/services/claims';
import { reportOf } from '$lib/server/services/report';
import { sha256 } from '$lib/server/services/revision-content';
import { askForReview } from '$lib/server/services/revisions';
import { giveVerdict } from '$lib/server/services/verdicts';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf } from '../helpers/people';
import { ionAt, makeReviewWorld, makeTree, treeRow, type ReviewWorld } from './review-fixture';

let db: TestDatabase;
let world: ReviewWorld;
let draftTree: string;
let approvedTree: string;
let approvedHash: string;

type Who = { id: string; name: string } | null;
const report = (who: Who, treeId: string, query = '') =>
  reportOf(who, treeId, world.studyId, reportOptions(new URLSearchParams(query)));
const download = async (who: Who, treeId: string, file: ReportFile, query = '') =>
  reportDownload(await report(who, treeId, query), file);

async function approve(treeId: string): Promise<string> {
  const { version: treeVersion } = await treeRow(treeId);
  const request = { reviewers: [world.reviewer.id], message: '', treeVersion };
  const { number: revision, hash } = await askForReview(world.annotator, treeId, request);
  await giveVerdict(world.reviewer, treeId, { verdict: 'approve', reason: '', revision, hash });
  return hash;
}

beforeAll(async () => {
  db = await openTestDatabase();
  world = await makeReviewWorld();
  draftTree = await makeTree(world.studyId, world.annotator, 'Unknown A / fraction 7');
  approvedTree = await makeTree(world.studyId, world.annotator, 'Unknown B');
  approvedHash = await approve(approvedTree);
});
afterAll(async () => {
  await closeDatabase();
  await db?.close();
});

describe('which state is printed', () => {
  it('is the draft for members while nothing is approved, and nothing for guests', async () => {
    expect((await report(world.annotator, draftTree)).report).toMatchObject({
      draft: true,
      source: { revision: null }
    });
    expect(await codeOf(report(world.guest, draftTree))).toBe('not-found');
    expect(await codeOf(report(world.guest, draftTree, 'revision=draft'))).toBe('not-found');
  });

  it('is the approved revision for everybody once it is the latest word', async () => {
    for (const who of [world.annotator, world.reviewer, world.lead, world.guest])
      expect((await report(who, approvedTree)).report).toMatchObject({
        ...{ draft: false, status: 'revision 1, approved' },
        source: { hash: approvedHash, approvals: [{ name: 'reviewer' }] }
      });
  });

  it('stays the approved revision for guests after a change, while members see the draft', async () => {
    const treeId = await makeTree(world.studyId, world.annotator, 'Unknown C');
    const hash = await approve(treeId);
    const ion = await ionAt(treeId, 1, 0);
    await decideClaims(world.annotator, treeId, [{ ionId: ion.id, version: ion.version, action: 'reject' }]);
    expect((await report(world.guest, treeId)).report.source).toMatchObject({ revision: 1, hash });
    expect((await report(world.guest, treeId, 'revision=draft')).report.source).toMatchObject({ revision: 1, hash });
    expect((await report(world.lead, treeId)).report).toMatchObject({ draft: true, source: { revision: null } });
    const frozen = await report(world.lead, treeId, 'revision=1');
    expect([sha256(frozen.json), frozen.report.rows.length]).toEqual([hash, 4]);
  });

  it('is refused to strangers, other guests and readers without an account', async () => {
    expect(await codeOf(report(world.otherGuest, approvedTree))).toBe('not-found');
    expect(await codeOf(report(world.stranger, approvedTree))).toBe('not-found');
    expect(await codeOf(report(null, approvedTree))).toBe('unauthenticated');
    expect(await codeOf(report(world.lead, approvedTree, 'revision=7'))).toBe('not-found');
  });
});

describe('the files', () => {
  it('CSV holds a line for each ion with calculated m/z, found m/z, error and who confirmed', async () => {
    const response = await download(world.guest, approvedTree, 'ions.csv', 'ions=all');
    expect(response.headers.get('content-type')).toContain('text/csv');
    const lines = (await response.text()).trimEnd().split('\r\n');
    expect(lines).toHaveLength(6);
    const names = lines[0].split(',');
    const rows = lines.slice(1).map((line) => Object.fromEntries(line.split(',').map((v, i) => [names[i], v])));
    // C6H8N3O+: 6·12 + 8·1.00782503 + 3·14.00307400 + 15.99491462 − 0.00054858 = 138.0662 (AME2020 masses).
    expect(rows.find((r) => r.ion_formula === 'C6H8N3O' && r.stage === '2')).toMatchObject({
      ...{ mz_calculated: '138.066188', mz_found: '138.066288', error_ppm: '0.4', loss: 'C2H3NO', link: 'measured' },
      ...{ intensity_percent: '100', claim: 'confirmed', confirmed_by: 'annotator', revision: '1', status: 'approved' }
    });
    expect(rows.find((r) => r.mz_found === '83.1234')).toMatchObject({ ion_formula: '', claim: 'open' });
  });

  it('JSON is the frozen content byte by byte, so that its SHA-256 is the printed hash', async () => {
    const text = await (await download(world.guest, approvedTree, 'tree.json', 'ions=confirmed')).text();
    expect(sha256(text)).toBe(approvedHash);
    const content = JSON.parse(text) as RevisionContent;
    expect(content).toMatchObject({ format: 'rivenmark-tree', formatVersion: 1, tree: { formula: 'C8H10N4O2' } });
    expect(content.ions).toHaveLength(5);
  });

  it('SVG is drawn by the same figure as the PDF, and cannot run or load anything', async () => {
    const response = await download(world.annotator, draftTree, 'figure.svg', 'figure=graph');
    expect(response.headers.get('content-security-policy')).toContain("default-src 'none'");
    const svg = await response.text();
    expect(svg).toMatch(/^<svg /);
    expect(svg).toBe(figureSvg((await report(world.annotator, draftTree, 'figure=graph')).report));
  });

  it('PDF is a PDF with embedded fonts and no picture, and names itself safely', async () => {
    const printed = await report(world.annotator, draftTree);
    expect(fileName(printed, 'report.pdf')).toBe('unknown-a-fraction-7-draft.pdf');
    const warned = vi.spyOn(console, 'warn');
    const response = await reportDownload(printed, 'report.pdf');
    // The typesetter only warns when a figure names a font that it cannot find, and leaves the text out.
    expect(warned).not.toHaveBeenCalled();
    warned.mockRestore();
    expect(response.headers.get('content-disposition')).toBe('attachment; filename="unknown-a-fraction-7-draft.pdf"');
    const bytes = Buffer.from(await response.arrayBuffer()).toString('latin1');
    expect(bytes.slice(0, 5)).toBe('%PDF-');
    expect(bytes.trimEnd().endsWith('%%EOF')).toBe(true);
    expect(bytes).toMatch(/\/FontName \/[A-Z]{6}\+IBMPlexMono/);
    expect(bytes).not.toContain('/Subtype /Image');
  });

  it('knows no other file', async () => {
    for (const name of ['report.docx', '../secrets', 'figure.png'])
      expect(() => reportFile(name)).toThrow(/no such file/);
  });
});

describe('the document behind the PDF', () => {
  const words = (value: unknown): string => {
    if (typeof value === 'string') return value;
    if (Array.isArray(value)) return value.map(words).join('');
    if (typeof value !== 'object' || value === null) return '';
    return Object.entries(value)
      .filter(([key]) => ['text', 'stack', 'columns', 'table', 'body'].includes(key))
      .map(([, inner]) => words(inner))
      .join('');
  };
  const documentOf = async (treeId: string) => {
    const { report: built } = await report(world.lead, treeId);
    return reportDocument(built, figureSvg(built));
  };

  it('says Draft across every page until approved', async () => {
    expect((await documentOf(draftTree)).watermark).toMatchObject({ text: 'Draft' });
    expect((await documentOf(approvedTree)).watermark).toBeUndefined();
  });

  it('holds figure, table, methods, confidence, approvals with hash, and the caution on every page', async () => {
    const document = await documentOf(approvedTree);
    const text = words(document.content);
    for (const part of [
      ...['C₆H₈N₃O', '138.0662', '138.0663', '+0.4', 'C₂H₃NO', '100.0', 'annotator'],
      ...['No confidence level was claimed', 'Approved by reviewer', approvedHash, 'elements CHNO'],
      ...['HCD, collision energy 30 eV', 'CID, collision energy 30 eV', '10 ppm, at least 1 mDa']
    ])
      expect(text).toContain(part);
    expect(text).not.toMatch(/identified|parent ion|daughter/i);
    const footer = document.footer as (page: number, pages: number) => unknown;
    expect(words(footer(2, 3))).toContain('a fragmentation tree supports a structure and does not prove it');
    expect(JSON.stringify(document.content)).toContain('"svg":"<svg');
  });
});
