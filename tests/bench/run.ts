/**
 * npm run bench [-- name [options]]: runs every bench, or the named one. A bench is a file `<name>.bench.ts` beside this
 * one. Ends with 1 when a goal is missed.
 */
import { readdirSync } from 'node:fs';
import { goalLines, isMet, type Bench } from './goal';

const SUFFIX = '.bench.ts';
const names = readdirSync(import.meta.dirname)
  .filter((file) => file.endsWith(SUFFIX))
  .map((file) => file.slice(0, -SUFFIX.length))
  .sort();

async function runBench(name: string, args: readonly string[]): Promise<boolean> {
  const { bench } = (await import(`./${name}${SUFFIX}`)) as { bench: Bench };
  console.log(`\n${name}: ${bench.title}`);
  const goals = await bench.run(args);
  for (const line of goalLines(goals)) console.log(line);
  return goals.every(isMet);
}

const [wanted, ...args] = process.argv.slice(2);
if (wanted !== undefined && !names.includes(wanted)) {
  console.error(`There is no bench "${wanted}"; there are: ${names.join(', ')}`);
  process.exit(2);
}
let allMet = true;
for (const name of wanted === undefined ? names : [wanted]) allMet = (await runBench(name, args)) && allMet;
process.exitCode = allMet ? 0 : 1;
