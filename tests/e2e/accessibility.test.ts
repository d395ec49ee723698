import { AxeBuilder } from '@axe-core/playwright';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { inventedFile, mzText } from './support/invented-run';
import { mailTo } from './support/mails';
import { buildOnlyTree, ionRow, open, openTree, selectIon, uploadRun } from './support/pages';
import { openWorld, type World } from './support/world';

const THEMES = ['light', 'dark'] as const;
type Theme = (typeof THEMES)[number];

let world: World;
let pages: Record<Theme, Page>;
let strangers: Record<Theme, Page>;
let run = '';
let tree = '';

/** A run, a tree under review with a remark on an ion, a mail: no screen may be empty. */
async function fill(page: Page): Promise<void> {
  await uploadRun(page, world.study, 'fraction-7.mzML', inventedFile());
  run = new URL(page.url()).pathname;
  tree = await buildOnlyTree(page);
  await selectIon(page, mzText('C17H18NO3'));
  await page.keyboard.press('Enter');
  await ionRow(page, mzText('C17H18NO3')).filter({ hasText: 'confirmed' }).waitFor();
  await page.getByLabel(/^Write a remark on m\/z/).fill('Is it water from the ring?');
  await page.getByRole('button', { name: 'Write remark' }).click();
  await page.getByRole('article', { name: 'Remark of lead' }).waitFor();
  await open(page, `${tree}/review`);
  await page.getByRole('checkbox', { name: 'reviewer' }).check();
  await page.getByRole('button', { name: 'Ask for review' }).click();
  await page.getByText('has not answered yet').waitFor();
  await mailTo(world.product.mailFolder, world.people.reviewer.email);
}

beforeAll(async () => {
  world = await openWorld();
  const [light, dark] = await Promise.all(
    THEMES.map((colorScheme) => world.as(world.people.lead, { colorScheme, reducedMotion: 'reduce' }))
  );
  pages = { light, dark };
  const [outside, outsideDark] = await Promise.all(THEMES.map((colorScheme) => world.window({ colorScheme })));
  strangers = { light: outside, dark: outsideDark };
  await fill(light);
});
afterAll(() => world?.close());

/** What a person with a screen reader, a keyboard or weak eyes stumbles over: rule, and the first places. */
async function obstacles(page: Page): Promise<string[]> {
  const { violations } = await new AxeBuilder({ page }).analyze();
  return violations
    .filter(({ impact }) => impact === 'serious' || impact === 'critical')
    .map(
      ({ id, nodes }) =>
        `${id}: ${nodes
          .slice(0, 3)
          .map(({ html }) => html.slice(0, 160))
          .join(' | ')}`
    );
}

const settings = () => `/settings/${world.groupId}`;
const SCREENS: [name: string, path: () => string][] = [
  ['the desk', () => '/'],
  ['the studies', () => '/studies'],
  ['the trees of a study', () => world.study],
  ['the runs of a study', () => `${world.study}/runs`],
  ['the members of a study', () => `${world.study}/members`],
  ['a run', () => run],
  ['the review', () => `${tree}/review`],
  ['the report', () => `${tree}/report`],
  ['the groups', () => '/settings'],
  ['the members of a group', settings],
  ['the invitations', () => `${settings()}/invitations`],
  ['the defaults', () => `${settings()}/defaults`],
  ['the audit log', () => `${settings()}/audit`],
  ['the account', () => '/account'],
  ['the page about the product', () => '/about'],
  ['a page that is not there', () => '/studies/nothing-here']
];
const OUTSIDE: [name: string, path: string][] = [
  ['signing in', '/sign-in'],
  ['a forgotten password', '/forgot'],
  ['the caught mails', '/dev/mail']
];

describe.each(THEMES)('in the %s theme', (theme) => {
  it.each(SCREENS)('%s has no serious obstacle', async (_name, path) => {
    await open(pages[theme], path());
    expect(await obstacles(pages[theme])).toEqual([]);
  });

  it.each(OUTSIDE)('%s has no serious obstacle', async (_name, path) => {
    await open(strangers[theme], path);
    expect(await obstacles(strangers[theme])).toEqual([]);
  });

  it('the workbench has no serious obstacle, with nothing, an ion and a spectrum selected', async () => {
    const page = pages[theme];
    await openTree(page, tree);
    expect(await page.locator('html').getAttribute('data-theme')).toBe(theme);
    expect(await obstacles(page)).toEqual([]);
    await selectIon(page, mzText('C17H18NO3'));
    expect(await obstacles(page)).toEqual([]);
    await openTree(page, `${tree}?spectrum=1`);
    expect(await obstacles(page)).toEqual([]);
  });

  it('the dialogs have no serious obstacle', async () => {
    const page = pages[theme];
    await open(page, '/studies');
    await page.getByRole('button', { name: 'New study' }).click();
    await page.getByRole('dialog').getByLabel('Name').waitFor();
    expect(await obstacles(page)).toEqual([]);
    await openTree(page, tree);
    await page.getByRole('button', { name: 'Settings' }).click();
    await page.getByRole('dialog').getByLabel('Elements').waitFor();
    expect(await obstacles(page)).toEqual([]);
  });
});
