import { mkdtempSync, rmSync, truncateSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { tmpdir } from 'node:os';
import { gzipSync } from 'node:zlib';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { openGate, type Gate } from '../helpers/gate';
import { inventedFile, mzText } from './support/invented-run';
import {
  buildOnlyTree,
  chooseFile,
  hydrated,
  inspector,
  ionGrid,
  ionRow,
  open,
  openTree,
  transferRow,
  uploadRun
} from './support/pages';
import { openWorld, type World } from './support/world';

let database: TestDatabase;
let gate: Gate;
let world: World;
let page: Page;

beforeAll(async () => {
  database = await openTestDatabase();
  gate = await openGate(database.url);
  world = await openWorld({ database, env: { DATABASE_URL: gate.url } });
  page = await world.as(world.people.annotator);
});
afterAll(async () => {
  await world?.close();
  await gate?.shut();
  await database?.close();
});

const runRow = (name: string) => page.getByRole('table', { name: 'Runs' }).getByRole('row').filter({ hasText: name });
/** No trace of a program may reach a person. */
const TRACE = /\bat .+:\d+:\d+|\.(ts|js|mjs)\b|undefined|\[object/;

const text = inventedFile().toString('latin1');
const bytes = (content: string) => Buffer.from(content, 'latin1');

describe('a file that cannot be used', () => {
  const whole = text.indexOf('</spectrum>', text.length / 2);
  const REFUSED: [what: string, name: string, file: () => Buffer, says: RegExp][] = [
    ['is not mzML', 'notes.mzML', () => bytes('Dear diary, today the trap was cold.'), /not mzML/i],
    ['is empty', 'empty.mzML', () => Buffer.alloc(0), /empty/i],
    ['is another program’s gzip', 'table.mzML.gz', () => gzipSync('a;b;c\n1;2;3\n'.repeat(50)), /not mzML/i],
    [
      'is a gzip bomb',
      'bomb.mzML.gz',
      () => gzipSync(bytes(' '.repeat(400e6) + text), { level: 9 }),
      /inflate to more than/
    ]
  ];
  it.each(REFUSED)('%s', async (_what, name, file, says) => {
    await chooseFile(page, world.study, name, file());
    const row = transferRow(page, name).filter({ hasText: says });
    await row.getByText(/\. /).first().waitFor();
    expect(await row.innerText()).not.toMatch(TRACE);
    await page.reload();
    await hydrated(page);
    expect(await runRow(name).count()).toBe(0);
  });

  const NOT_READ: [what: string, name: string, file: () => Buffer, says: RegExp][] = [
    [
      'holds a DTD',
      'dtd.mzML',
      () => bytes(text.replace('?>', '?>\n<!DOCTYPE mzML [<!ENTITY a "b">]>')),
      /document type|DTD|DOCTYPE/i
    ]
  ];
  it.each(NOT_READ)('%s: the run says so and what to do', async (_what, name, file, says) => {
    await chooseFile(page, world.study, name, file());
    await runRow(name).getByText('Not read.').waitFor();
    const said = await runRow(name).innerText();
    expect(said).toMatch(says);
    expect(said).not.toMatch(TRACE);
    await page.getByRole('table', { name: 'Runs' }).getByRole('link', { name }).click();
    await page.getByRole('heading', { name }).waitFor();
    expect(await page.getByRole('button', { name: 'Build trees' }).count()).toBe(0);
  });

  it('was cut off: its complete scans are kept and the loss is named', async () => {
    await uploadRun(page, world.study, 'cut.mzML', bytes(text.slice(0, whole + 40)));
    const said = await page.getByRole('main').innerText();
    expect(said).toContain('The file ends too early, at byte');
    const kept = (text.slice(0, whole + 40).match(/<\/spectrum>/g) ?? []).length;
    const scans = /Ion current\s+([^]*?)\s+scans/.exec(said)?.[1] ?? '';
    const counts = [...scans.matchAll(/MS\d\s+(\d+)/g)].map(([, count]) => Number(count));
    expect(counts.reduce((sum, count) => sum + count, 0)).toBe(kept);
    expect(said).not.toMatch(TRACE);
  });

  it('has no MSn: it is read and says that there is nothing to build', async () => {
    const ms1 = text.replace(/<spectrum [^]*?<\/spectrum>/g, (one) =>
      /name="ms level" value="1"/.test(one) ? one : ''
    );
    await chooseFile(page, world.study, 'survey.mzML', bytes(ms1));
    await page.getByRole('table', { name: 'Runs' }).getByRole('link', { name: 'survey.mzML' }).click();
    await page.getByText('This run fragments no precursor ion').waitFor();
    expect(await page.getByRole('button', { name: 'Build trees' }).count()).toBe(0);
  });

  it('has a path in its name: the path is gone', async () => {
    await chooseFile(page, world.study, '..\\..\\etc\\passwd.mzML', bytes(text.replace('</run>', '<!-- b --></run>')));
    await page.getByRole('table', { name: 'Runs' }).getByRole('link', { name: 'passwd.mzML', exact: true }).waitFor();
    expect(await page.getByRole('table', { name: 'Runs' }).innerText()).not.toContain('etc');
  });

  it('is there already: the first one is named', async () => {
    await uploadRun(page, world.study, 'first.mzML', bytes(text));
    await chooseFile(page, world.study, 'second.mzML', bytes(text));
    await transferRow(page, 'second.mzML')
      .getByText(/first\.mzML/)
      .waitFor();
    await page.reload();
    await hydrated(page);
    expect(await runRow('second.mzML').count()).toBe(0);
  });

  it('has 3 GB: it is refused with the limit before a byte is sent', async () => {
    const folder = mkdtempSync(join(tmpdir(), 'large-'));
    const path = join(folder, 'large.mzML');
    writeFileSync(path, '');
    truncateSync(path, 3e9);
    const sent: string[] = [];
    page.on('request', (request) => request.url().includes('/api/uploads') && sent.push(request.method()));
    await open(page, `${world.study}/runs`);
    await page.getByLabel('mzML files').setInputFiles(path);
    await transferRow(page, 'large.mzML')
      .getByText(/3\.00 GB.*at most 2\.15 GB/)
      .waitFor();
    expect(sent).toEqual([]);
    rmSync(folder, { recursive: true });
  });
});

describe('a transfer that is cut off', () => {
  it('goes on by itself where it stopped', async () => {
    const large = bytes(text.replace('</run>', `<!-- ${'x'.repeat(30e6)} --></run>`));
    await open(page, `${world.study}/runs`);
    const offsets: number[] = [];
    let broken = false;
    await page.route('**/api/uploads/**', async (route) => {
      const offset = Number((await route.request().headerValue('upload-offset')) ?? 0);
      if (route.request().method() === 'PATCH') offsets.push(offset);
      if (offset > 0 && !broken) {
        broken = true;
        await route.abort('connectionreset');
      } else await route.continue();
    });
    await chooseFile(page, world.study, 'long.mzML', large);
    await page
      .getByRole('table', { name: 'Runs' })
      .getByRole('link', { name: 'long.mzML' })
      .waitFor({ timeout: 60_000 });
    await page.unroute('**/api/uploads/**');
    expect(broken).toBe(true);
    expect(offsets.filter((offset) => offset === 0)).toHaveLength(1);
  });
});

describe('the database away for ten seconds', () => {
  it('is said in words, and what a person decided meanwhile is not half-written', async () => {
    await page.getByRole('table', { name: 'Runs' }).getByRole('link', { name: 'first.mzML' }).click();
    const tree = await buildOnlyTree(page);
    const mz = mzText('C16H16NO3');
    await ionRow(page, mz).click();
    await gate.shut();
    const cut = Date.now();
    await ionGrid(page).focus();
    await page.keyboard.press('Enter');
    const alert = page.getByRole('alert').filter({ hasText: /database/i });
    await alert.waitFor();
    expect(await alert.innerText()).not.toMatch(TRACE);
    await ionRow(page, mz).filter({ hasText: 'proposed' }).waitFor();
    const other = await page.context().newPage();
    expect((await other.goto(tree))?.status()).toBe(500);
    expect(await other.innerText('body')).toContain('The database does not answer at the moment.');
    await other.close();
    await page.waitForTimeout(Math.max(0, 10_000 - (Date.now() - cut)));
    await gate.open();
    await openTree(page, tree);
    await ionRow(page, mz).filter({ hasText: 'proposed' }).click();
    await ionGrid(page).focus();
    await page.keyboard.press('Enter');
    await ionRow(page, mz).filter({ hasText: 'confirmed' }).waitFor();
    await inspector(page).getByText('confirmed by annotator').waitFor();
  });
});

describe('the server killed in mid-file', () => {
  it('reads the run to its end once it is started again', async () => {
    const cycle = /<spectrum [^]*<\/spectrum>/.exec(text)![0];
    const many = text.replace(cycle, () => Array<string>(400).fill(cycle).join('\n'));
    await chooseFile(page, world.study, 'many.mzML', bytes(many));
    await runRow('many.mzML').getByRole('progressbar').waitFor();
    await world.product.kill('SIGKILL');
    await world.product.restart();
    await open(page, `${world.study}/runs`);
    await page.getByRole('table', { name: 'Runs' }).getByRole('link', { name: 'many.mzML' }).click();
    await page.getByRole('heading', { name: /^Precursor ions/ }).waitFor({ timeout: 120_000 });
    const surveys = 400 * (cycle.match(/name="ms level" value="1"/g) ?? []).length;
    expect(await page.getByRole('main').innerText()).toContain(`MS1 ${surveys}`);
  });
});

it('no page threw an error of its own', () => {
  expect(world.scriptErrors).toEqual([]);
});
