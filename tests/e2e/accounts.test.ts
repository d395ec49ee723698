import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { TEST_PASSWORD } from '../helpers/people';
import { hydrated, open } from './support/pages';
import { mailTo } from './support/mails';
import { openWorld, signIn, type World } from './support/world';

const NEWCOMER = 'newcomer@rivenmark.test';
const NEW_PASSWORD = 'seven quiet lanterns drift';

let world: World;
beforeAll(async () => {
  world = await openWorld();
});
afterAll(() => world?.close());

/** Opens the development mailbox and follows the link of the newest mail to an address. */
async function followMail(page: Page, to: string, subject: string): Promise<void> {
  await open(page, '/dev/mail');
  await page.locator(`[data-mail][data-to*="${to}"]`).filter({ hasText: subject }).first().getByRole('link').click();
  const mail = page.getByRole('article', { name: 'Chosen mail' });
  await mail.getByRole('heading', { name: subject }).waitFor();
  await mail.locator('a[href*="token="]').click();
  await page.waitForURL(/token=/);
  await hydrated(page);
}

const path = (page: Page): string => new URL(page.url()).pathname;
const account = (page: Page) => page.getByRole('region', { name: 'Sessions' });

describe('an invitation', () => {
  let link = '';

  it('goes out by mail, and its link makes the account and joins the group', async () => {
    const lead = await world.as(world.people.lead);
    await open(lead, `/settings/${world.groupId}/invitations`);
    await lead.getByLabel('E-mail address').fill(NEWCOMER);
    await lead.getByLabel('Role').selectOption('annotator');
    await lead.getByRole('button', { name: 'Send the invitation' }).click();
    await lead.locator(`[data-invitation="${NEWCOMER}"]`).getByText('open until').waitFor();
    await mailTo(world.product.mailFolder, NEWCOMER);

    const page = await world.window();
    await followMail(page, NEWCOMER, 'Invitation to the group Shore extracts');
    link = page.url();
    await page.getByLabel('Your name').fill('newcomer');
    await page.getByLabel('Password', { exact: true }).fill('short');
    await page.getByLabel('Password, once more').fill('short');
    await page.getByRole('button', { name: 'Make the account and join' }).click();
    expect(await page.getByRole('alert').first().innerText()).toMatch(/characters/);
    await page.getByLabel('Password', { exact: true }).fill(NEW_PASSWORD);
    await page.getByLabel('Password, once more').fill(NEW_PASSWORD);
    await page.getByRole('button', { name: 'Make the account and join' }).click();
    await page.waitForURL((url) => url.pathname === '/');
    await open(page, '/studies');
    await page.getByRole('link', { name: 'Fraction 7' }).waitFor();
    await open(lead, `/settings/${world.groupId}`);
    expect(await lead.locator(`[data-member="${NEWCOMER}"] [data-role]`).innerText()).toBe('annotator');
  });

  it('works once', async () => {
    const page = await world.window();
    expect(await open(page, link)).toBe(410);
    expect(await page.getByRole('main').innerText()).not.toMatch(/at .+:\d+:\d+/);
    expect(await page.getByLabel('Your name').count()).toBe(0);
  });

  it('leads to an account that can sign in, with its password only', async () => {
    const page = await world.window();
    await signIn(page, NEWCOMER, TEST_PASSWORD);
    await page.getByRole('alert').waitFor();
    expect(path(page)).toBe('/sign-in');
    await signIn(page, NEWCOMER, NEW_PASSWORD);
    await page.waitForURL((url) => url.pathname === '/');
    await page.getByRole('button', { name: 'Sign out' }).click();
    await page.waitForURL(/sign-in/);
    await open(page, '/studies');
    expect(path(page)).toBe('/sign-in');
  });
});

describe('a forgotten password', () => {
  it('is replaced through a mailed link; the old one and all sessions end', async () => {
    const { reviewer } = world.people;
    const before = await world.as(reviewer);
    const page = await world.window();
    await open(page, '/sign-in');
    await page.getByRole('link', { name: 'Forgot the password?' }).click();
    await page.getByRole('heading', { name: 'Forgot the password?' }).waitFor();
    await page.getByLabel('E-mail address').fill(reviewer.email);
    await page.getByRole('button', { name: 'Send the link' }).click();
    await page.getByRole('status').filter({ hasText: 'a mail with a link is on its way' }).waitFor();
    await mailTo(world.product.mailFolder, reviewer.email);
    await followMail(page, reviewer.email, 'Choose a new password');
    const link = page.url();
    await page.getByLabel('New password', { exact: true }).fill(NEW_PASSWORD);
    await page.getByLabel('New password, once more').fill(NEW_PASSWORD);
    await page.getByRole('button', { name: 'Save the password' }).click();
    await page.getByText('Your new password holds.').waitFor();

    await open(before, '/account');
    expect(path(before)).toBe('/sign-in');
    await signIn(page, reviewer.email, TEST_PASSWORD);
    await page.getByRole('alert').waitFor();
    await signIn(page, reviewer.email, NEW_PASSWORD);
    await page.waitForURL((url) => url.pathname === '/');
    expect(await open(await world.window(), link)).toBe(410);
  });

  it('is answered alike for an address without an account', async () => {
    const page = await world.window();
    await open(page, '/forgot');
    await page.getByLabel('E-mail address').fill('nobody@rivenmark.test');
    await page.getByRole('button', { name: 'Send the link' }).click();
    const said = await page.getByRole('status').filter({ hasText: 'is on its way' }).innerText();
    expect(said).toContain('If nobody@rivenmark.test has an account here');
  });
});

describe('sessions', () => {
  it('are listed, and one that is ended opens nothing any more', async () => {
    const { annotator } = world.people;
    const here = await world.as(annotator);
    const there = await world.as(annotator);
    await open(here, '/account');
    await account(here).locator('[data-session="current"]').waitFor();
    expect(await account(here).locator('[data-session]').count()).toBe(2);
    await account(here).locator('[data-session="other"]').getByRole('button').click();
    await account(here).locator('[data-session="other"]').waitFor({ state: 'detached' });
    await open(there, '/studies');
    expect(path(there)).toBe('/sign-in');
    await open(here, '/studies');
    expect(path(here)).toBe('/studies');
  });
});

it('too many wrong passwords are slowed down in words', async () => {
  const page = await world.window();
  const said: string[] = [];
  for (let i = 0; i < 9; i++) {
    await signIn(page, world.people.lead.email, `wrong number ${i} of them`);
    said.push(await page.getByRole('alert').innerText());
  }
  expect(said[0]).not.toMatch(/minutes/);
  expect(said[8]).toMatch(/Try again in \d+ (minutes|seconds)/);
});

it('no page threw an error of its own', () => {
  expect(world.scriptErrors).toEqual([]);
});
