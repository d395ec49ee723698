import { readFile } from 'node:fs/promises';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { makeGroup, makePerson } from '../helpers/people';
import { inventedFile, MOLECULE, mzText, PRECURSOR, UNEXPLAINED } from './support/invented-run';
import { mailTo } from './support/mails';
import {
  buildOnlyTree,
  inspector,
  ionRow,
  open,
  openTree,
  proposalsShown,
  selectIon,
  uploadRun
} from './support/pages';
import { openWorld, type World } from './support/world';

let world: World;
let annotator: Page;
let reviewer: Page;
let lead: Page;
let guest: Page;
/** path of the workbench */
let tree = '';
const CONFIRMED = ['C17H18NO3', 'C16H16NO3', 'C9H12NO2'];
const REJECTED = 'C8H7O2';

beforeAll(async () => {
  world = await openWorld();
  const { people } = world;
  annotator = await world.as(people.annotator);
  reviewer = await world.as(people.reviewer);
  lead = await world.as(people.lead);
  guest = await world.as(people.guest);
});
afterAll(() => world?.close());

/** Decides on an ion with the inspector's buttons, and waits until the server has agreed. */
async function decide(page: Page, formula: string, act: 'Confirm' | 'Reject'): Promise<void> {
  await selectIon(page, mzText(formula));
  const saved = page.waitForResponse((response) => response.url().endsWith('/claims'));
  await inspector(page).getByRole('button', { name: act, exact: true }).click();
  expect((await saved).status()).toBe(200);
  await ionRow(page, mzText(formula))
    .filter({ hasText: act === 'Confirm' ? 'confirmed' : 'rejected' })
    .waitFor();
}

async function askForReview(page: Page, message: string): Promise<void> {
  await open(page, `${tree}/review`);
  await page.getByRole('group', { name: 'Reviewers' }).getByLabel('reviewer').first().check();
  await page.getByLabel('Message (goes out by mail)').fill(message);
  await page.getByRole('button', { name: 'Ask for review' }).click();
}

async function giveVerdict(page: Page, verdict: string, reason: string): Promise<void> {
  await page.getByRole('radio', { name: verdict }).check();
  await page.locator('#verdict-reason').fill(reason);
  await page.getByRole('button', { name: 'Give verdict' }).click();
}

async function download(page: Page, name: string): Promise<{ name: string; bytes: Buffer }> {
  const arrives = page.waitForEvent('download');
  await page.getByRole('group', { name: 'Downloads' }).getByRole('link', { name, exact: true }).click();
  const file = await arrives;
  return { name: file.suggestedFilename(), bytes: await readFile(await file.path()) };
}

const history = (page: Page) => page.getByRole('region', { name: 'Revisions and verdicts' });

describe('the annotator', () => {
  it('uploads an mzML file and sees what it holds', async () => {
    await uploadRun(annotator, world.study, 'fraction-7.mzML', inventedFile());
    const table = annotator.getByRole('table', { name: 'Precursor ions' });
    expect(await table.innerText()).toContain(mzText(PRECURSOR));
    const current = await annotator.getByRole('region', { name: 'Ion current' }).innerText();
    expect(current.replace(/\s+/g, ' ')).toMatch(/MS1 4 ?· ?MS2 4 ?· ?MS3 4 ?· ?MS4 4/);
  });

  it('builds the tree and gets the formula of the molecule', async () => {
    tree = await buildOnlyTree(annotator);
    expect(tree).toMatch(/^\/studies\/[0-9a-f-]{36}\/trees\/[0-9a-f-]{36}$/);
    expect(await annotator.getByTitle('Show the candidates').innerText()).toBe(MOLECULE);
    for (const formula of CONFIRMED)
      expect(await ionRow(annotator, mzText(formula)).innerText()).toMatch(new RegExp(`${formula}\\s[^]*proposed`));
    expect(await ionRow(annotator, UNEXPLAINED.toFixed(4)).innerText()).toContain('open');
  });

  it('confirms ions, rejects one, and a new suggestion overwrites neither', async () => {
    for (const formula of CONFIRMED) await decide(annotator, formula, 'Confirm');
    await decide(annotator, REJECTED, 'Reject');

    const answered = annotator.waitForResponse((response) => response.url().endsWith('/suggest'));
    await annotator.getByRole('button', { name: 'Suggest' }).click();
    expect((await answered).status()).toBe(200);
    await annotator
      .getByRole('status')
      .filter({ has: annotator.getByRole('progressbar') })
      .waitFor();
    await proposalsShown(annotator);
    await openTree(annotator, tree);
    for (const formula of CONFIRMED)
      expect(await ionRow(annotator, mzText(formula)).innerText()).toContain('confirmed');
    expect(await ionRow(annotator, mzText(REJECTED)).innerText()).toContain('rejected');
  });

  it('asks a named reviewer, who gets a mail with the way to the tree', async () => {
    await annotator.getByRole('link', { name: 'Ask for review' }).click();
    await askForReview(annotator, 'Please look at the loss of water.');
    await history(annotator).getByText('under review').waitFor();
    expect(await history(annotator).innerText()).toContain('has not answered yet');
    const mail = await mailTo(world.product.mailFolder, world.people.reviewer.email);
    expect(mail.text).toContain(`${world.product.origin}${tree}/review`);
    expect(mail.text).toContain('Please look at the loss of water.');
  });
});

describe('the reviewer', () => {
  it('finds the tree on the desk and writes a remark on an ion', async () => {
    await open(reviewer, '/');
    await reviewer.getByRole('region', { name: 'Waiting for your verdict' }).getByRole('link').first().click();
    await reviewer.waitForURL(`**${tree}/review`);
    await openTree(reviewer, tree);
    await selectIon(reviewer, mzText('C9H12NO2'));
    await reviewer.getByLabel(/^Write a remark on m\/z/).fill('Could C9H12NO2 not come from the ring as well?');
    await reviewer.getByRole('button', { name: 'Write remark' }).click();
    await reviewer.getByRole('article', { name: 'Remark of reviewer' }).waitFor();
    await ionRow(reviewer, mzText('C9H12NO2')).filter({ hasText: 'disputed' }).waitFor();
    const fact = reviewer.getByText('open remarks', { exact: true }).locator('..');
    expect(await fact.innerText()).toMatch(/\n1$/);
  });

  it('asks for changes, not without a reason', async () => {
    await open(reviewer, `${tree}/review`);
    await reviewer.getByRole('radio', { name: 'Ask for changes' }).check();
    await reviewer.getByRole('button', { name: 'Give verdict' }).click();
    expect(
      await reviewer.locator('#verdict-reason').evaluate((field: HTMLTextAreaElement) => field.validity.valid)
    ).toBe(false);
    await giveVerdict(reviewer, 'Ask for changes', 'Answer the remark on C9H12NO2 first.');
    await history(reviewer).getByText('asked for changes').waitFor();
    const mail = await mailTo(world.product.mailFolder, world.people.annotator.email);
    expect(mail.text).toContain('Answer the remark on C9H12NO2 first.');
  });
});

describe('the second round', () => {
  it('starts at the annotator’s desk; the remark is answered and settled', async () => {
    await open(annotator, '/');
    await annotator.getByRole('region', { name: 'Changes asked of you' }).getByRole('link').first().waitFor();
    await open(annotator, `${tree}/review`);
    const remark = annotator.getByRole('article', { name: 'Remark of reviewer' });
    await remark.getByRole('button', { name: 'Reply' }).click();
    await remark
      .getByLabel('Your reply')
      .fill('The MS3 spectrum does not show it, so it comes from the precursor ion.');
    await remark.getByRole('button', { name: 'Reply', exact: true }).click();
    await remark.getByText('does not show it').waitFor();
    await remark.getByRole('button', { name: 'Resolve' }).click();
    await remark.waitFor({ state: 'detached' });
    await openTree(annotator, tree);
    await decide(annotator, 'C9H10NO', 'Confirm');
    await askForReview(annotator, 'Answered.');
    await history(annotator).getByRole('link', { name: 'Revision 2' }).waitFor();
    expect((await mailTo(world.product.mailFolder, world.people.reviewer.email, 2)).text).toContain('Answered.');
  });

  it('ends with an approval that is bound to the hash of what was seen', async () => {
    await open(reviewer, `${tree}/review`);
    const hash = await reviewer.locator('form[action="?/verdict"] input[name=hash]').inputValue();
    expect(hash).toMatch(/^[0-9a-f]{64}$/);
    const changes = reviewer.getByRole('region', { name: 'What changed since revision 1' });
    expect(await changes.innerText()).toContain('C9H10NO');
    await giveVerdict(reviewer, 'Approve', 'Now it is consistent.');
    await history(reviewer).getByText('approved', { exact: true }).waitFor();
    expect(await history(reviewer).locator(`[title="${hash}"]`).count()).toBe(1);
  });
});

describe('the lead', () => {
  it('takes PDF, CSV and SVG of the approved tree, without the word draft', async () => {
    await open(lead, `${tree}/report`);
    const sheet = lead.getByRole('article', { name: 'Report' });
    expect(await sheet.innerText()).not.toMatch(/draft/i);
    const pdf = await download(lead, 'PDF');
    expect(pdf.name).toMatch(/\.pdf$/);
    expect(pdf.bytes.subarray(0, 5).toString('latin1')).toBe('%PDF-');
    expect(pdf.bytes.subarray(-8).toString('latin1')).toContain('%%EOF');
    expect(pdf.bytes.length).toBeGreaterThan(10_000);
    const csv = (await download(lead, 'CSV')).bytes.toString('utf8');
    const lines = csv.trim().split(/\r?\n/);
    for (const formula of CONFIRMED) expect(lines.filter((line) => line.includes(formula)).length).toBeGreaterThan(0);
    const svg = (await download(lead, 'SVG')).bytes.toString('utf8');
    expect(svg).toMatch(/^<(\?xml|svg)/);
    expect(svg).toContain('</svg>');
  });

  it('gives the guest this study to read', async () => {
    await open(lead, `/settings/${world.groupId}`);
    const row = lead.locator(`[data-member="${world.people.guest.email}"]`);
    await row.getByText('Change').click();
    await row.getByLabel('Fraction 7').check();
    await row.getByRole('button', { name: 'Save' }).click();
    await row.getByText('1 study opened').waitFor();
    expect(await open(guest, world.study)).toBe(200);
  });
});

describe('after the approval', () => {
  it('a change makes a new draft, and the approved revision stays as it was', async () => {
    await openTree(annotator, tree);
    await decide(annotator, 'C16H14NO2', 'Confirm');
    await open(annotator, `${tree}/report?revision=draft`);
    expect(await annotator.getByRole('article', { name: 'Report' }).innerText()).toMatch(/draft/i);
    await open(annotator, `${tree}/report?revision=2`);
    expect(await annotator.getByRole('article', { name: 'Report' }).innerText()).not.toMatch(/draft/i);
    await open(annotator, world.study);
    expect(await annotator.getByRole('row').filter({ hasText: 'fraction-7.mzML' }).innerText()).toContain('draft');
  });
});

describe('a guest', () => {
  it('reads the approved report of the opened study and can change nothing', async () => {
    expect(await open(guest, `${tree}/report`)).toBe(200);
    expect(await guest.getByRole('article', { name: 'Report' }).innerText()).toContain('Approved');
    expect(await guest.getByRole('button', { name: /Confirm|Suggest|Write|Ask/ }).count()).toBe(0);
    const id = tree.split('/').at(-1);
    const decisions = [{ ionId: 1, version: 1, action: 'reject' }];
    for (const [method, path, data] of [
      ['POST', `/api/trees/${id}/claims`, { decisions }],
      ['PATCH', `/api/trees/${id}`, { version: 1, name: 'Mine' }],
      ['POST', `/api/trees/${id}/suggest`, {}],
      ['POST', `/api/trees/${id}/remarks`, { anchor: 'tree', body: 'Mine' }]
    ] as const)
      expect(`${method} ${path} ${(await guest.request.fetch(path, { method, data })).status()}`).toBe(
        `${method} ${path} 403`
      );
  });
});

describe('somebody else', () => {
  it('who has not signed in gets nothing', async () => {
    const page = await world.window();
    for (const path of ['/', world.study, `${world.study}/runs`, tree, `${tree}/review`, `${tree}/report`]) {
      await open(page, path);
      expect(new URL(page.url()).pathname).toBe('/sign-in');
    }
    const api = `/api/trees/${tree.split('/').at(-1)}`;
    expect((await page.request.get(api)).status()).toBe(401);
    expect((await page.request.get(`${tree}/report/report.pdf`, { maxRedirects: 0 })).ok()).toBe(false);
  });

  it('who is in another group finds nothing at these addresses', async () => {
    const person = await makePerson('neighbour');
    await makeGroup('Next door', [[person, 'lead']]);
    const page = await world.as(person);
    for (const path of [world.study, `${world.study}/runs`, tree, `${tree}/review`, `${tree}/report`])
      expect(`${path} ${(await page.request.get(path)).status()}`).toBe(`${path} 404`);
    const id = tree.split('/').at(-1);
    for (const path of [`/api/trees/${id}`, `/api/trees/${id}/remarks`, `${tree}/report/report.pdf`])
      expect(`${path} ${(await page.request.get(path)).status()}`).toBe(`${path} 404`);
  });
});

it('no page threw an error of its own', () => {
  expect(world.scriptErrors).toEqual([]);
});
