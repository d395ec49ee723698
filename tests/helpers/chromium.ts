import { existsSync } from 'node:fs';
import { chromium, type Browser } from 'playwright-core';

const PATH = '/usr/bin/chromium';
const ARGS = [
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
  '--disable-dev-shm-usage'
];

/**
 * Starts Debian's Chromium without a window. Close it in `afterAll`.
 * @throws Error with the command that installs it
 */
export function launchChromium(): Promise<Browser> {
  if (!existsSync(PATH))
    throw new Error(`${PATH} is missing. \`npm test\` installs it, or: apt-get install chromium fonts-liberation`);
  return chromium.launch({ executablePath: PATH, args: ARGS });
}
