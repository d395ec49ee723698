/**
 * From a stored file to a finished run: `npm run bench -- mzml-run [--size 200MB] [--rounds 2] [--folder dir]`. The job is
 * done in this process, on a MariaDB of its own; its wall time is divided by that of the limit in the same round.
 */
import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { database } from '$lib/server/db';
import { jobContext } from '$lib/server/jobs/job';
import { perform } from '$lib/server/jobs/perform';
import { claim } from '$lib/server/jobs/queue';
import { settle } from '$lib/server/jobs/settle';
import { fileStore } from '$lib/server/storage';
import { addPerson, addRun, addStudy, openStage } from '../integration/support/stage';
import { median, option, type Bench } from './goal';
import { bundleProcess, fileOf, openFolder } from './mzml-files';
import type { Taken } from './mzml-process';

interface Done {
  wall: number;
  cpu: number;
  /** longest time between two reports of progress, ms. */
  longestSilence: number;
}

/** Claims the queued job and does it. */
async function work(): Promise<Done> {
  const job = await claim(database(), `bench:1:${process.pid}`, ['read-run']);
  if (!job) throw new Error('no job is queued');
  const start = performance.now();
  const before = process.cpuUsage();
  let last = start;
  let longestSilence = 0;
  const report = () => {
    longestSilence = Math.max(longestSilence, performance.now() - last);
    last = performance.now();
  };
  const context = jobContext({ db: database(), store: fileStore(), job, report, isCancelled: () => false });
  const outcome = await perform(context);
  await settle(database(), job, outcome);
  if (outcome.kind !== 'done') throw new Error(`the job ended as ${JSON.stringify(outcome)}`);
  const { user, system } = process.cpuUsage(before);
  report();
  return { wall: performance.now() - start, cpu: (user + system) / 1000, longestSilence };
}

export const bench: Bench = {
  title: 'from upload complete to run complete, beside the least that any reader must do',
  async run(args) {
    const size = option(args, 'size', '200MB');
    const rounds = Number(option(args, 'rounds', '2'));
    const { folder, close } = openFolder(args);
    const stage = await openStage();
    try {
      const path = fileOf(folder, size);
      const program = await bundleProcess(folder);
      const place = await addStudy(database(), [[await addPerson(database(), 'annotator'), 'annotator']]);
      const ratios: number[] = [];
      for (let round = 0; round < rounds; round++) {
        const limit = JSON.parse(
          execFileSync(process.execPath, [program, 'limit', path], { encoding: 'utf8' })
        ) as Taken;
        await addRun(database(), place, readFileSync(path));
        const done = await work();
        ratios.push(done.wall / limit.wall);
        const figures = [done.wall, done.cpu, limit.wall, done.longestSilence].map((ms) => (ms / 1000).toFixed(2));
        console.log(
          `${size}: run ${figures[0]} s (CPU ${figures[1]} s), limit ${figures[2]} s, longest silence ${figures[3]} s`
        );
      }
      return [{ what: `${size} run complete, wall / limit`, measured: median(ratios), limit: 3, bound: 'at most' }];
    } finally {
      await stage.close();
      close();
    }
  }
};
