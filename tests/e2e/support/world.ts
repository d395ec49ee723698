import type { Browser, BrowserContext, BrowserContextOptions, Page } from 'playwright-core';
import { closeDatabase } from '$lib/server/db';
import type { Role } from '$lib/schema/group';
import { launchChromium } from '../../helpers/chromium';
import { makeGroup, makePerson, makeStudy, TEST_PASSWORD, type TestPerson } from '../../helpers/people';
import { startProduct, type Product, type ProductOptions } from '../../helpers/server';
import { open } from './pages';

/** A served product, one Chromium, a group with a person for each role, and an empty study. */
export interface World {
  product: Product;
  people: Record<Role, TestPerson>;
  groupId: string;
  studyId: string;
  /** /studies/… */
  study: string;
  /** A window of its own, as somebody who has not signed in. */
  window(options?: BrowserContextOptions): Promise<Page>;
  /** A window of its own, as a person who has signed in through the form. */
  as(person: TestPerson, options?: BrowserContextOptions): Promise<Page>;
  /** Uncaught errors of all pages so far. */
  scriptErrors: string[];
  close(): Promise<void>;
}

/** Signs in through the form. */
export async function signIn(page: Page, email: string, password = TEST_PASSWORD): Promise<void> {
  await open(page, '/sign-in');
  await page.getByLabel('E-mail address').fill(email);
  await page.getByLabel('Password').fill(password);
  await page.getByRole('button', { name: 'Sign in' }).click();
}

async function makeTeam(): Promise<Pick<World, 'people' | 'groupId' | 'studyId' | 'study'>> {
  const roles: Role[] = ['annotator', 'reviewer', 'lead', 'guest'];
  const made = await Promise.all(roles.map((role) => makePerson(role)));
  const people = Object.fromEntries(roles.map((role, i) => [role, made[i]])) as Record<Role, TestPerson>;
  const groupId = await makeGroup(
    'Shore extracts',
    roles.map((role) => [people[role], role])
  );
  const studyId = await makeStudy(groupId, 'Fraction 7');
  return { people, groupId, studyId, study: `/studies/${studyId}` };
}

/** Starts everything; `close` in `afterAll`. */
export async function openWorld(options: ProductOptions = {}): Promise<World> {
  const product = await startProduct(options);
  let browser: Browser | null = null;
  const close = async () => {
    await browser?.close();
    await closeDatabase();
    await product.stop();
  };
  try {
    const team = await makeTeam();
    const chromium = (browser = await launchChromium());
    const scriptErrors: string[] = [];
    const window = async (more: BrowserContextOptions = {}) => {
      const context: BrowserContext = await chromium.newContext({
        ...{ baseURL: product.origin, viewport: { width: 1440, height: 900 }, acceptDownloads: true },
        ...more
      });
      context.setDefaultTimeout(30_000);
      const page = await context.newPage();
      page.on('pageerror', (error) => scriptErrors.push(`${page.url()}: ${error.message}`));
      return page;
    };
    const as = async (person: TestPerson, more?: BrowserContextOptions) => {
      const page = await window(more);
      await signIn(page, person.email);
      await page.waitForURL((url) => url.pathname === '/');
      return page;
    };
    return { product, ...team, window, as, scriptErrors, close };
  } catch (error) {
    await close();
    throw error;
  }
}
