/**
 * How fast mzML is read: `npm run bench -- mzml [--size 20MB,200MB,1GB] [--rounds 3] [--modes limit,full] [--folder dir]`.
 * Each mode runs in a process of its own, all modes in turn in each round; its CPU is divided by that of the limit in the
 * same round, and the median of the rounds counts. The files are made first; `--folder` keeps them for the next time.
 */
import { execFile } from 'node:child_process';
import { promisify } from 'node:util';
import { median, option, type Bench, type Goal } from './goal';
import { bundleProcess, bytesOf, fileOf, openFolder } from './mzml-files';
import { MODES } from './mzml-modes';
import type { Taken } from './mzml-process';

const run = promisify(execFile);
const ALL_MODES = [...Object.keys(MODES), 'two-workers'];
type Results = Map<string, Taken[]>;

/** Runs all modes in turn, `rounds` times. @throws Error when two modes do not find the same spectra and peaks */
async function measure(program: string, path: string, modes: readonly string[], rounds: number): Promise<Results> {
  const results: Results = new Map(modes.map((mode) => [mode, []]));
  for (let round = 0; round < rounds; round++) {
    for (const mode of modes) {
      const { stdout } = await run(process.execPath, [program, mode, path]);
      const taken = JSON.parse(stdout) as Taken;
      const limit = results.get('limit')?.[0] ?? taken;
      if (taken.spectra !== limit.spectra || (taken.peaks ?? limit.peaks) !== limit.peaks) {
        throw new Error(
          `${mode} found ${taken.spectra} spectra and ${taken.peaks} peaks, the limit ${limit.spectra} and ${limit.peaks}`
        );
      }
      results.get(mode)?.push(taken);
    }
  }
  return results;
}

const of = (results: Results, mode: string) => results.get(mode) ?? [];
const highestRss = (results: Results, mode: string) => Math.max(...of(results, mode).map((taken) => taken.rss));

function ratio(results: Results, mode: string, to: string, what: 'cpu' | 'wall'): number {
  return median(of(results, mode).map((taken, round) => taken[what] / of(results, to)[round][what]));
}

function print(size: string, results: Results): void {
  const [first] = of(results, 'limit');
  console.log(`${size}: ${first.spectra} spectra, ${first.peaks} peaks, ${of(results, 'limit').length} rounds`);
  console.log('mode          CPU s  CPU/limit  wall/limit  peak RSS MB');
  for (const [mode, list] of results) {
    const cpu = (median(list.map((taken) => taken.cpu)) / 1000).toFixed(2).padStart(7);
    const ratios = (['cpu', 'wall'] as const).map((what) =>
      ratio(results, mode, 'limit', what).toFixed(2).padStart(11)
    );
    console.log(mode.padEnd(12) + cpu + ratios.join(' ') + highestRss(results, mode).toFixed(0).padStart(13));
  }
}

/** The goals that the modes measured allow to judge. */
function goalsOf(size: string, results: Results): Goal[] {
  const has = (...modes: string[]) => modes.every((mode) => of(results, mode).length > 0);
  const goals: Goal[] = [];
  const atMost = (what: string, measured: number, limit: number, unit?: string) =>
    goals.push({ what: `${size} ${what}`, measured, limit, bound: 'at most', unit });
  const large = bytesOf(size) >= 2e8;
  if (has('full') && large) atMost('full read, CPU / limit', ratio(results, 'full', 'limit', 'cpu'), 1.54);
  if (has('full')) atMost('full read, memory', highestRss(results, 'full'), 150, 'MB');
  if (has('metadata') && large) atMost('metadata only, CPU / limit', ratio(results, 'metadata', 'limit', 'cpu'), 1.25);
  if (has('two-workers')) atMost('two workers, memory', highestRss(results, 'two-workers'), 250, 'MB');
  if (has('index')) atMost('index, CPU / limit', ratio(results, 'index', 'limit', 'cpu'), 0.15);
  if (has('by-index')) {
    atMost('one scan by index', median(of(results, 'by-index').map((taken) => taken.each ?? NaN)), 2, 'ms');
  }
  if (has('full', 'xml-stream') && large) {
    const measured = ratio(results, 'xml-stream', 'full', 'cpu');
    goals.push({ what: `${size} XML stream, CPU / full read`, measured, limit: 2, bound: 'at least' });
  }
  return goals;
}

export const bench: Bench = {
  title: 'reading mzML, beside the least that any reader must do',
  async run(args) {
    const sizes = option(args, 'size', '20MB,200MB,1GB').split(',');
    const rounds = Number(option(args, 'rounds', '3'));
    const modes = option(args, 'modes', ALL_MODES.join(',')).split(',');
    if (!modes.includes('limit')) modes.unshift('limit');
    const { folder, close } = openFolder(args);
    try {
      const program = await bundleProcess(folder);
      const goals: Goal[] = [];
      const memory = new Map<string, number>();
      for (const size of sizes) {
        const results = await measure(program, fileOf(folder, size), modes, rounds);
        print(size, results);
        goals.push(...goalsOf(size, results));
        memory.set(size, highestRss(results, 'full'));
      }
      const [small, big] = [memory.get('200MB'), memory.get('1GB')];
      if (small !== undefined && big !== undefined && modes.includes('full')) {
        goals.push({
          what: 'memory at 1 GB / at 200 MB, full read',
          measured: big / small,
          limit: 1.3,
          bound: 'at most'
        });
      }
      return goals;
    } finally {
      close();
    }
  }
};
