/**
 * `npm run screenshots [folder]`: a picture of every screen in both themes and two widths, from the demo.
 * Not a test: somebody has to look at them.
 */
import { mkdirSync } from 'node:fs';
import { join, resolve } from 'node:path';
import type { Browser, BrowserContext, Page } from 'playwright-core';
import { root } from '../../src/ops/root.mjs';
import { say } from '../../src/ops/run-quietly.mjs';
import { launchChromium } from '../helpers/chromium';
import { startProduct, type Product } from '../helpers/server';
import { open } from './support/pages';
import { findPlaces, SCREENS, type Places, type Screen } from './support/screens';
import { signIn } from './support/world';

const THEMES = ['light', 'dark'] as const;
const SIZES = [
  { width: 1440, height: 900 },
  { width: 390, height: 844 }
] as const;

type Windows = Map<Screen['as'], BrowserContext>;

/** Waits for fonts, the layout of the graph and running transitions. */
async function settled(page: Page): Promise<void> {
  await page.waitForLoadState('networkidle');
  await page.evaluate(() => document.fonts.ready.then(() => undefined));
  await page.evaluate(() => Promise.all(document.getAnimations().map((animation) => animation.finished)).then(() => 0));
}

/** A signed-in window for each person of the demo, and one for a stranger. */
async function openWindows(browser: Browser, product: Product, theme: (typeof THEMES)[number]): Promise<Windows> {
  const windows: Windows = new Map();
  for (const as of ['stranger', 'annotator', 'reviewer', 'lead', 'guest'] as const) {
    const context = await browser.newContext({ baseURL: product.origin, colorScheme: theme, reducedMotion: 'reduce' });
    context.setDefaultTimeout(20_000);
    windows.set(as, context);
    const account = product.accounts.find(({ email }) => email.startsWith(as));
    if (!account) continue;
    const page = await context.newPage();
    await signIn(page, account.email, account.password);
    await page.waitForURL((url) => url.pathname === '/');
    await page.close();
  }
  return windows;
}

async function take(context: BrowserContext, screen: Screen, places: Places, file: (width: number) => string) {
  for (const size of SIZES) {
    const page = await context.newPage();
    await page.setViewportSize(size);
    await open(page, screen.path(places));
    await screen.then?.(page);
    await settled(page);
    await page.screenshot({ path: file(size.width), fullPage: true });
    await page.close();
  }
}

const folder = resolve(process.argv[2] ?? join(root, '.test-data', 'screenshots'));
mkdirSync(folder, { recursive: true });
const product = await startProduct({ demo: true });
const browser = await launchChromium();
let failed = 0;
try {
  for (const theme of THEMES) {
    const windows = await openWindows(browser, product, theme);
    const places = await findPlaces(windows.get('lead')!, product);
    for (const screen of SCREENS)
      try {
        await take(windows.get(screen.as)!, screen, places, (width) =>
          join(folder, `${screen.name}-${theme}-${width}.png`)
        );
      } catch (error) {
        failed++;
        say(`${screen.name} (${theme}): ${error instanceof Error ? error.message : String(error)}`);
      }
    for (const context of windows.values()) await context.close();
  }
} finally {
  await browser.close();
  await product.stop();
}
say(`${SCREENS.length * THEMES.length * SIZES.length - failed * SIZES.length} pictures in ${folder}`);
process.exitCode = failed > 0 ? 1 : 0;
