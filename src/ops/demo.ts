/**
 * Loads the demo into the database of DATABASE_URL, once. Run in a process of its own beside a web server that answers
 * at ORIGIN and works on the jobs.
 */
import { runCommand } from './bootstrap.mjs';
import { loadedDemo, stampDemo } from './demo-stamp';
import { Advice, say } from './run-quietly.mjs';

async function main(): Promise<number> {
  const url = process.env.DATABASE_URL;
  if (!url) throw new Advice('DATABASE_URL is not set. `npm start` loads the demo by itself.');
  if (await loadedDemo(url)) return 0;
  const { loadDemo, DEMO_ACCOUNTS } = await import('../lib/server/demo');
  const { closeDatabase } = await import('../lib/server/db');
  try {
    await loadDemo((line) => say(`  ${line}`));
    await stampDemo(url, DEMO_ACCOUNTS);
  } finally {
    await closeDatabase();
  }
  return 0;
}

runCommand(main);
