import { build } from 'esbuild';
import { fileURLToPath } from 'node:url';
import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, expect, it } from 'vitest';
import { launchChromium } from '../helpers/chromium';
import { answerFor } from './support/core-worker';
import { inventedFile, MOLECULE } from './support/invented-run';

let browser: Browser;
beforeAll(async () => {
  browser = await launchChromium();
});
afterAll(() => browser?.close());

interface Answer {
  summary: { scanCount: number };
  suggestions: { candidates: { formula: string; adduct: string }[] }[];
}
const SITE = 'http://core.test/';

/** The worker as one file for the browser. @throws Error when the core imports anything of Node */
async function workerScript(): Promise<string> {
  const module = fileURLToPath(new URL('./support/core-worker.ts', import.meta.url));
  const contents = `import { answerFor } from ${JSON.stringify(module)};
    const has = ['document', 'process', 'require'].filter((name) => name in self);
    self.onmessage = ({ data }) => answerFor(data).then(
      (answer) => self.postMessage({ answer, has }),
      (error) => self.postMessage({ error: String(error) })
    );`;
  const { outputFiles } = await build({
    stdin: { contents, resolveDir: fileURLToPath(new URL('.', import.meta.url)) },
    ...{ bundle: true, write: false, platform: 'browser', format: 'iife', target: 'chrome110', logLevel: 'silent' }
  });
  return outputFiles[0].text;
}

it('the core gives in a Web Worker of the browser the same answer as in Node', { timeout: 60_000 }, async () => {
  const file = inventedFile(2);
  const script = await workerScript();
  const page = await browser.newPage();
  await page.route(`${SITE}**`, (route) =>
    route.request().url().endsWith('/worker.js')
      ? route.fulfill({ contentType: 'text/javascript', body: script })
      : route.fulfill({ contentType: 'text/html', body: '<!doctype html><title>core</title>' })
  );
  await page.goto(SITE);
  const reply = await page.evaluate(
    ({ base64, address }) =>
      new Promise<{ answer?: string; has?: string[]; error?: string }>((done, fail) => {
        const worker = new Worker(address);
        worker.onmessage = ({ data }) => done(data);
        worker.onerror = (event) => fail(new Error(event.message));
        worker.postMessage(Uint8Array.from(atob(base64), (c) => c.charCodeAt(0)));
      }),
    { base64: file.toString('base64'), address: `${SITE}worker.js` }
  );
  expect(reply.error).toBeUndefined();
  expect(reply.has).toEqual([]);
  const here = await answerFor(file);
  const { suggestions, summary } = JSON.parse(here) as Answer;
  expect(summary.scanCount).toBe(8);
  expect(suggestions[0].candidates[0]).toMatchObject({ formula: MOLECULE, adduct: '[M+H]+' });
  expect(JSON.parse(reply.answer ?? '')).toEqual(JSON.parse(here));
});
