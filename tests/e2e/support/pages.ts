import type { Locator, Page } from 'playwright-core';

/** Waits until the page answers to its user: the router takes scrolling over once everything is hydrated. */
export async function hydrated(page: Page): Promise<void> {
  await page.waitForFunction(() => history.scrollRestoration === 'manual');
}

/** Goes to an address of the product and waits until it answers. @returns HTTP status */
export async function open(page: Page, path: string): Promise<number> {
  const response = await page.goto(path);
  await hydrated(page);
  return response?.status() ?? 0;
}

/** Puts a file into the upload panel of a study's runs. */
export async function chooseFile(page: Page, study: string, name: string, bytes: Buffer): Promise<void> {
  if (new URL(page.url()).pathname !== `${study}/runs`) await open(page, `${study}/runs`);
  await page.getByLabel('mzML files').setInputFiles({ name, mimeType: 'application/octet-stream', buffer: bytes });
}

/** Row of the upload panel that speaks of a file. */
export const transferRow = (page: Page, name: string): Locator =>
  page.getByRole('list', { name: 'Transfers' }).getByRole('listitem').filter({ hasText: name });

/** Uploads a file and waits on the page of its run until it has been read. */
export async function uploadRun(page: Page, study: string, name: string, bytes: Buffer): Promise<void> {
  await chooseFile(page, study, name, bytes);
  await page.getByRole('table', { name: 'Runs' }).getByRole('link', { name }).click();
  await page.getByRole('heading', { name: /^Precursor ions/ }).waitFor();
}

/** On a run's page: builds the tree of its only precursor ion and opens it. @returns path of the workbench */
export async function buildOnlyTree(page: Page): Promise<string> {
  await page.getByRole('button', { name: 'Build trees' }).click();
  const done = page.getByRole('status').filter({ hasText: '1 tree built' });
  await done.getByRole('link').click();
  await proposalsShown(page);
  return new URL(page.url()).pathname;
}

/** In the workbench of somebody who may edit: waits until no suggestion is running and the tree has a formula. */
export async function proposalsShown(page: Page): Promise<void> {
  await page.getByRole('button', { name: 'Suggest' }).waitFor();
  await page.getByTitle('Show the candidates').filter({ hasText: /C\d/ }).waitFor();
}

/** Opens a tree, which has its proposals, in the workbench. */
export async function openTree(page: Page, path: string): Promise<void> {
  await open(page, path);
  await page.getByTitle('Show the candidates').filter({ hasText: /C\d/ }).waitFor();
}

export const ionGrid = (page: Page): Locator => page.getByRole('grid', { name: 'Ions' });

/** Row of the ion table that shows an m/z. */
export const ionRow = (page: Page, mz: string): Locator => ionGrid(page).getByRole('row').filter({ hasText: mz });

export const inspector = (page: Page): Locator => page.getByRole('complementary', { name: 'Inspector' });

/** Selects an ion in the table and waits until the inspector shows it with its candidates. */
export async function selectIon(page: Page, mz: string): Promise<void> {
  await ionRow(page, mz).click();
  await inspector(page).getByText(mz).first().waitFor();
  await inspector(page).getByRole('heading', { name: 'History' }).waitFor();
}
