/**
 * npm run fuzz [-- --cases 10000] [--seed 0] [folder...]: reads damaged mzML files and demands that nothing but typed errors
 * comes out, that no case takes over two seconds, that memory stays under 300 MB, and that the quick way of reading gives
 * the same as the XML parser. The files are the project's own fixtures and all of the folders named. A case is made from
 * its number alone: `--seed N --cases 1` does case N again.
 */
import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { isDeepStrictEqual } from 'node:util';
import { gunzipSync } from 'node:zlib';
import { option } from '../bench/goal';
import { fixtures } from './fixtures';
import { mutated } from './mutate';
import { outcomeOf } from './outcome';
import { Random } from './random';

const SLOWEST_MS = 2000;
const MOST_MB = 300;
/** Larger files are cut to some of their spectra, so that damage meets all parts of a file. */
const LARGE = 120_000;
/** The XML parser is slow, so that only smaller files are read twice. */
const TWICE_UNTIL = 60_000;

interface File {
  name: string;
  bytes: Buffer;
}

function readFile(path: string): Buffer {
  const bytes = readFileSync(path);
  return bytes[0] === 0x1f && bytes[1] === 0x8b ? gunzipSync(bytes) : bytes;
}

/** Head and tail of a file with a stretch of its spectra between. */
function excerpt(bytes: Buffer, random: Random): Buffer {
  const head = bytes.indexOf('<spectrum ');
  const tail = bytes.lastIndexOf('</spectrumList>');
  if (bytes.length < LARGE || head < 0 || tail < head || random.below(20) === 0) return bytes;
  const wanted = head + random.below(tail - head);
  const found = bytes.indexOf('<spectrum ', wanted);
  const from = found < 0 || found > tail ? head : found;
  const to = bytes.lastIndexOf('</spectrum>', Math.min(tail, from + LARGE)) + '</spectrum>'.length;
  const end = bytes.subarray(tail, Math.min(bytes.length, tail + LARGE / 4));
  return Buffer.concat([bytes.subarray(0, head), bytes.subarray(from, Math.max(from, to)), end]);
}

function filesOf(folders: readonly string[]): File[] {
  const own = [...fixtures()].map(([name, bytes]) => ({ name, bytes }));
  const named = folders.flatMap((folder) =>
    readdirSync(folder)
      .filter((name) => /\.mzml(\.gz)?$/i.test(name))
      .map((name) => ({ name, bytes: readFile(join(folder, name)) }))
  );
  return [...own, ...named];
}

/** What is wrong with one case, or null; `outcomes` counts how files ended. */
async function judge(bytes: Buffer, random: Random, outcomes: Map<string, number>): Promise<string | null> {
  const size = random.pick([1 << 16, 1 << 20, 1 + random.below(5000)]);
  const start = performance.now();
  const outcome = await outcomeOf(bytes, {}, size);
  const took = performance.now() - start;
  const how = outcome.error?.code ?? 'read';
  outcomes.set(how, (outcomes.get(how) ?? 0) + 1);
  if (took > SLOWEST_MS) return `took ${took.toFixed(0)} ms`;
  const rss = process.memoryUsage.rss() / 1e6;
  if (rss > MOST_MB) return `left ${rss.toFixed(0)} MB in use`;
  if (bytes.length > TWICE_UNTIL) return null;
  const slow = await outcomeOf(bytes, { quick: false }, size);
  return isDeepStrictEqual(slow, outcome) ? null : 'the quick way gives another result than the XML parser';
}

const args = process.argv.slice(2);
const cases = Number(option(args, 'cases', '10000'));
const first = Number(option(args, 'seed', '0'));
const folders = args.filter((arg, i) => !arg.startsWith('--') && !args[i - 1]?.startsWith('--'));
const files = filesOf(folders);
const outcomes = new Map<string, number>();
let slowest = 0;
let failures = 0;
for (let seed = first; seed < first + cases; seed++) {
  const random = new Random(seed);
  const file = random.pick(files);
  const damaged = mutated(excerpt(file.bytes, random), random, random.pick(files).bytes);
  const start = performance.now();
  const wrong = await judge(damaged, random, outcomes).catch((error: unknown) =>
    error instanceof Error ? (error.stack ?? error.message) : String(error)
  );
  slowest = Math.max(slowest, performance.now() - start);
  if (!wrong) continue;
  failures++;
  console.error(`case ${seed} (${file.name}): ${wrong}`);
}
const memory = process.resourceUsage().maxRSS / 1000;
console.log(`${cases} cases of ${files.length} files: ${failures} failures, slowest ${slowest.toFixed(0)} ms`);
console.log(
  [...outcomes]
    .sort((a, b) => b[1] - a[1])
    .map(([how, count]) => `${how} ${count}`)
    .join(', ')
);
console.log(`highest memory ${memory.toFixed(0)} MB (at most ${MOST_MB})`);
process.exitCode = failures > 0 || memory > MOST_MB ? 1 : 0;
