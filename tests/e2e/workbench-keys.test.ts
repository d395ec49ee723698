import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { inventedFile, mzText } from './support/invented-run';
import { buildOnlyTree, hydrated, inspector, ionGrid, ionRow, open, openTree, uploadRun } from './support/pages';
import { openWorld, type World } from './support/world';

let world: World;
let page: Page;
let tree = '';

beforeAll(async () => {
  world = await openWorld();
  page = await world.as(world.people.annotator);
  await uploadRun(page, world.study, 'fraction-7.mzML', inventedFile());
  tree = await buildOnlyTree(page);
});
afterAll(() => world?.close());

const selected = () => ionGrid(page).locator('[role=row][aria-selected=true]');
const cell = async (column: number): Promise<string> => selected().getByRole('gridcell').nth(column).innerText();
const state = (words: string) => selected().filter({ hasText: words }).waitFor();
/** What is written of the selected ion: its m/z as the table has it. */
const selectedMz = () => cell(0);
const ionInAddress = () => new URL(page.url()).searchParams.get('ion');

describe('keys in the ion table', () => {
  it('arrows move, Home and End jump', async () => {
    await openTree(page, tree);
    await ionGrid(page).focus();
    await page.keyboard.press('ArrowDown');
    const top = await selectedMz();
    await page.keyboard.press('ArrowDown');
    const next = await selectedMz();
    expect(Number(next)).toBeLessThan(Number(top));
    await page.keyboard.press('ArrowUp');
    expect(await selectedMz()).toBe(top);
    await page.keyboard.press('End');
    expect(await selectedMz()).toBe(mzText('C8H7O2'));
    await page.keyboard.press('Home');
    expect(await selectedMz()).toBe(top);
  });

  it('Enter confirms, U takes it back, Delete rejects, U takes that back too', async () => {
    await ionRow(page, mzText('C16H16NO3')).click();
    await ionGrid(page).focus();
    await state('proposed');
    await page.keyboard.press('Enter');
    await state('confirmed');
    await inspector(page).getByText('confirmed by annotator').waitFor();
    await page.keyboard.press('u');
    await state('proposed');
    await page.keyboard.press('Delete');
    await state('rejected');
    await inspector(page).getByText('rejected by annotator').waitFor();
    await page.keyboard.press('U');
    await state('proposed');
    await inspector(page).getByText('undid the last decision').first().waitFor();
    await page.reload();
    await hydrated(page);
    await state('proposed');
    expect(await selectedMz()).toBe(mzText('C16H16NO3'));
  });

  it('quick keys one after the other all arrive', async () => {
    await page.keyboard.press('Escape');
    await ionGrid(page).focus();
    await page.keyboard.press('Home');
    const rows: string[] = [];
    for (let i = 0; i < 3; i++) {
      rows.push(await selectedMz());
      await page.keyboard.press('Enter');
      await page.keyboard.press('ArrowDown');
    }
    for (const mz of rows) await ionRow(page, mz).filter({ hasText: 'confirmed' }).waitFor();
    await page.reload();
    await hydrated(page);
    for (const mz of rows) await ionRow(page, mz).filter({ hasText: 'confirmed' }).waitFor();
    expect(new Set(rows).size).toBe(3);
  });

  it('keys typed into a remark decide nothing', async () => {
    await ionRow(page, mzText('C9H12NO2')).click();
    const field = page.getByLabel(/^Write a remark on m\/z/);
    await field.fill('Why');
    await field.press('Enter');
    await field.press('u');
    expect(await field.inputValue()).toBe('Why\nu');
    await field.fill('');
    await state('proposed');
  });

  it('? lists the keys', async () => {
    await ionGrid(page).focus();
    await page.keyboard.press('?');
    const help = page.getByRole('dialog', { name: /keys/i });
    expect(await help.innerText()).toMatch(/Enter[^]*confirm/i);
    await page.keyboard.press('Escape');
    await help.waitFor({ state: 'hidden' });
  });
});

describe('the selection', () => {
  it('is the same in table, cascade, inspector and address, and survives a reload', async () => {
    const mz = mzText('C9H12NO2');
    await openTree(page, tree);
    await ionRow(page, mz).click();
    await inspector(page).getByText(mz).first().waitFor();
    await page.waitForURL(/[?&]ion=\d+/);
    const ion = ionInAddress();
    await page.reload();
    await hydrated(page);
    await selected().waitFor();
    expect(await selectedMz()).toBe(mz);
    expect(ionInAddress()).toBe(ion);
    await inspector(page).getByText(mz).first().waitFor();
  });

  it('can be sent to a colleague', async () => {
    const colleague = await world.as(world.people.reviewer);
    await open(colleague, page.url());
    await inspector(colleague).getByText(mzText('C9H12NO2')).first().waitFor();
    expect(await ionGrid(colleague).locator('[aria-selected=true]').count()).toBe(1);
  });

  it('follows to another spectrum through the list of where the ion was seen', async () => {
    await ionRow(page, mzText('C16H14NO2')).click();
    const before = ionInAddress();
    const other = inspector(page).getByRole('button', { name: /MS3/ }).first();
    await other.click();
    await page.waitForFunction((was) => new URLSearchParams(location.search).get('ion') !== was, before);
    await page
      .getByRole('region', { name: 'Ion table' })
      .getByText(`MS3 ${mzText('C17H18NO3')}`)
      .waitFor();
    expect(await selectedMz()).toBe(mzText('C16H14NO2'));
  });

  it('Escape takes it away', async () => {
    await ionGrid(page).focus();
    await page.keyboard.press('Escape');
    await page.waitForURL((url) => !url.searchParams.has('ion'));
    expect(await selected().count()).toBe(0);
  });
});

describe('light and dark', () => {
  const background = () => page.evaluate(() => getComputedStyle(document.documentElement).backgroundColor);
  const brightness = (colour: string) => [...colour.matchAll(/\d+/g)].slice(0, 3).map(Number);

  it('is chosen on the account page, holds after a reload and follows the system otherwise', async () => {
    await open(page, '/account');
    await page.getByRole('radio', { name: 'Dark' }).check();
    await page.reload();
    expect(await page.locator('html').getAttribute('data-theme')).toBe('dark');
    expect(Math.max(...brightness(await background()))).toBeLessThan(80);
    await hydrated(page);
    await page.getByRole('radio', { name: 'Light' }).check();
    expect(await page.locator('html').getAttribute('data-theme')).toBe('light');
    expect(Math.min(...brightness(await background()))).toBeGreaterThan(180);
    await page.getByRole('radio', { name: 'As the system' }).check();
    await page.emulateMedia({ colorScheme: 'dark' });
    await page.locator('html[data-theme=dark]').waitFor();
    await page.emulateMedia({ colorScheme: 'light' });
    await page.locator('html[data-theme=light]').waitFor();
  });
});

it('no page threw an error of its own', () => {
  expect(world.scriptErrors).toEqual([]);
});
