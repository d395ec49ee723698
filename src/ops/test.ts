/** `npm test`, once the packages are there: a database of its own, a build apart, every test, one closing line. */
import { spawn } from 'node:child_process';
import { mkdirSync, rmSync } from 'node:fs';
import { join } from 'node:path';
import { parseArgs } from 'node:util';
import { runCommand } from './bootstrap.mjs';
import { startMariadb } from './mariadb';
import { root } from './root.mjs';
import { Advice, say } from './run-quietly.mjs';
import { addCounts, closingLine, countTests, type Count } from './test-count';
import { ensureTestBuild, makeRunFolder, sweepDeadRuns } from './test-folder';

const PROJECTS = ['unit', 'integration', 'e2e'] as const;
type Project = (typeof PROJECTS)[number];
/** ms that one project may take before it counts as hung */
const LIMIT = 45 * 60_000;

interface Call {
  projects: Project[];
  screenshots: boolean;
  rest: string[];
}

const stopping = new AbortController();

/** @throws Advice when an argument is not understood */
function readCall(): Call {
  const { values, positionals } = parseArgs({
    options: { only: { type: 'string' }, screenshots: { type: 'boolean', default: false } },
    allowPositionals: true
  });
  const names = values.only?.split(',') ?? [...PROJECTS];
  const projects = PROJECTS.filter((project) => names.includes(project));
  if (projects.length !== names.length)
    throw new Advice(`--only takes ${PROJECTS.join(', ')}, or several of them joined by commas; got "${values.only}".`);
  return { projects, screenshots: values.screenshots, rest: positionals };
}

/** Runs a Node program in its own process group and ends whatever is left of the group. @returns exit status */
function runGroup(args: string[], env: NodeJS.ProcessEnv): Promise<number> {
  return new Promise((done, fail) => {
    const child = spawn(process.execPath, args, {
      cwd: root,
      env,
      stdio: ['ignore', 'inherit', 'inherit'],
      detached: true
    });
    const group = (name: NodeJS.Signals) => {
      try {
        if (child.pid) process.kill(-child.pid, name);
      } catch (error) {
        if ((error as NodeJS.ErrnoException).code !== 'ESRCH') throw error;
      }
    };
    const stop = () => {
      group('SIGTERM');
      setTimeout(() => group('SIGKILL'), 10_000).unref();
    };
    const timer = setTimeout(() => {
      say(`Still running after ${LIMIT / 60_000} minutes: ended.`);
      stop();
    }, LIMIT);
    stopping.signal.addEventListener('abort', stop);
    child.once('error', fail);
    child.once('exit', (code) => {
      clearTimeout(timer);
      stopping.signal.removeEventListener('abort', stop);
      group('SIGKILL');
      done(code ?? 1);
    });
  });
}

async function runProject(project: Project, folder: string, env: NodeJS.ProcessEnv, filters: string[]): Promise<Count> {
  say(`\n── ${project} tests`);
  const report = join(folder, `${project}.json`);
  const args = [
    join(root, 'node_modules/vitest/vitest.mjs'),
    'run',
    '--project',
    project,
    '--reporter=default',
    '--reporter=json',
    `--outputFile.json=${report}`,
    ...(filters.length > 0 ? ['--passWithNoTests', ...filters] : [])
  ];
  return countTests(report, await runGroup(args, env));
}

async function runTests({ projects, rest }: Call, folder: string, env: NodeJS.ProcessEnv): Promise<number> {
  let total: Count = { passed: 0, failed: 0, skipped: 0 };
  for (const project of projects)
    if (!stopping.signal.aborted) total = addCounts(total, await runProject(project, folder, env, rest));
  if (stopping.signal.aborted) total.failed++;
  const nothing = total.passed + total.failed === 0;
  closing = (nothing ? 'No test was run.\n' : '') + closingLine(total);
  return total.failed > 0 || nothing ? 1 : 0;
}

let closing: string | null = null;

async function prepare(call: Call, folder: string): Promise<{ env: NodeJS.ProcessEnv; stop: () => Promise<void> }> {
  const env: NodeJS.ProcessEnv = { ...process.env, RIVENMARK_TEST_FOLDER: join(folder, 'tmp') };
  mkdirSync(join(folder, 'tmp'));
  if (!call.screenshots && call.projects.every((project) => project === 'unit')) return { env, stop: async () => {} };
  if (call.screenshots || call.projects.includes('e2e')) env.RIVENMARK_TEST_BUILD = await ensureTestBuild();
  say('Starting MariaDB for the tests …');
  const mariadb = await startMariadb({ folder: join(folder, 'mariadb'), quick: true });
  env.RIVENMARK_TEST_DB_URL = mariadb.url;
  return { env, stop: mariadb.stop };
}

async function run(call: Call): Promise<number> {
  await sweepDeadRuns();
  const folder = makeRunFolder();
  let stop = async () => {};
  try {
    const prepared = await prepare(call, folder);
    stop = prepared.stop;
    if (call.screenshots)
      return await runGroup(['--import', 'tsx', join(root, 'tests/e2e/screenshots.ts'), ...call.rest], prepared.env);
    return await runTests(call, folder, prepared.env);
  } finally {
    await stop();
    rmSync(folder, { recursive: true, force: true });
  }
}

for (const name of ['SIGINT', 'SIGTERM', 'SIGHUP'] as const) process.on(name, () => stopping.abort());

runCommand(async () => {
  try {
    const call = readCall();
    return await run(call).catch((error: unknown) => {
      // The build or the database failed: no test could run, which is a failure of the tests.
      if (!call.screenshots) closing = closingLine({ passed: 0, failed: 1, skipped: 0 });
      throw error;
    });
  } finally {
    if (process.connected) process.disconnect();
    if (closing) process.on('exit', () => process.stdout.write(`${closing}\n`));
  }
});
