/**
 * How fast formulas are enumerated: `npm run bench -- formula`. CPU per call, best of batches after a warm-up, against a
 * general npm package that is asked for the same; the numbers of formulas must be equal.
 */
import { formatFormula, ionMz, parseFormula } from '../../src/lib/core/chem';
import { enumerateFormulas, forEachFormula, formulaSpace, subformulaSpace } from '../../src/lib/core/formula';
import type { ElementRanges } from '../../src/lib/core/model';
import { CHNOPS, general, HALOGENS_UP_TO, MASSES, WITH_HALOGENS } from './formula-grid';
import { median, type Bench, type Goal } from './goal';
import { seeded } from './seeded';

/** CPU ms of one call: the best of some batches, each long enough for the clock. */
async function cost(work: () => unknown): Promise<number> {
  let calls = 1;
  let best = Infinity;
  for (let batch = 0; batch < 5;) {
    const start = process.cpuUsage().user;
    for (let i = 0; i < calls; i++) await work();
    const ms = (process.cpuUsage().user - start) / 1e3;
    if (ms < 20 && calls < 1e6) calls = Math.ceil(calls * Math.min(10, 30 / Math.max(ms, 1)));
    else {
      best = Math.min(best, ms / calls);
      batch++;
      if (ms > 1500) break;
    }
  }
  return best;
}

interface Row {
  set: string;
  ppm: number;
  mass: number;
  count: number;
  bare: number;
  product: number;
}

async function measure(set: string, ranges: ElementRanges, ppm: number, mass: number): Promise<Row> {
  const window = mass * ppm * 1e-6;
  const space = formulaSpace(ranges);
  const counted = (share: number) => {
    let count = 0;
    forEachFormula(space, mass - window * share, mass + window * share, () => count++);
    return count;
  };
  const bareCount = () => counted(1);
  const product = () => enumerateFormulas(mass, window, ranges, { minDbe: 0, parity: 'whole' }).length;
  const [own, theirs] = [bareCount(), await general(mass, ppm, ranges, false)];
  const [ownMolecules, theirMolecules] = [product(), await general(mass, ppm, ranges, true)];
  // A formula that lies on the very edge of the window may count for one and not for the other.
  const edge = counted(1 + 1e-6) - counted(1 - 1e-6);
  if (Math.abs(own - theirs) > edge || Math.abs(ownMolecules - theirMolecules) > edge)
    throw new Error(
      `${set} ${ppm} ppm ${mass}: ${own}/${ownMolecules} formulas, the package has ${theirs}/${theirMolecules}`
    );
  const row = {
    ...{ set, ppm, mass, count: own },
    bare: (await cost(() => general(mass, ppm, ranges, false))) / (await cost(bareCount)),
    product: (await cost(() => general(mass, ppm, ranges, true))) / (await cost(product))
  };
  console.log(
    `${set.padEnd(12)} ${String(ppm).padStart(2)} ppm ${mass.toFixed(4).padStart(9)} ${String(own).padStart(7)} formulas  ` +
      `bare ${row.bare.toFixed(1).padStart(6)} x  filtered and sorted ${row.product.toFixed(1).padStart(6)} x`
  );
  return row;
}

/** Product ions of one invented parent: fifty of its sub-formulas. */
async function subFormulas(): Promise<number> {
  const whole = parseFormula('C40H60N10O15S');
  const random = seeded(11);
  const ions = Array.from({ length: 50 }, () => {
    const share = 0.1 + 0.85 * random();
    const part = Object.entries(whole).map(([s, n]) => [
      s,
      Math.min(n, Math.round(n * share * (0.7 + 0.6 * random())))
    ]);
    return ionMz(Object.fromEntries(part) as typeof whole, 1);
  });
  const space = subformulaSpace(whole);
  const ranges = Object.fromEntries(Object.entries(whole).map(([s, n]) => [s, [0, n] as const]));
  const own = () => {
    let count = 0;
    for (const mz of ions) forEachFormula(space, mz * (1 - 5e-6), mz * (1 + 5e-6), () => count++);
    return count;
  };
  const theirs = async () => {
    let count = 0;
    for (const mz of ions) count += await general(mz, 5, ranges, false);
    return count;
  };
  const [counted, expected] = [own(), await theirs()];
  if (counted !== expected) throw new Error(`sub-formulas: ${counted}, the package has ${expected}`);
  const ratio = (await cost(theirs)) / (await cost(own));
  console.log(`sub-formulas of ${formatFormula(whole)} for 50 ions: ${counted}, ${ratio.toFixed(1)} x`);
  return ratio;
}

async function run(): Promise<Goal[]> {
  const rows: Row[] = [];
  for (const ppm of [5, 20])
    for (const mass of MASSES) {
      rows.push(await measure('CHNOPS', CHNOPS, ppm, mass));
      if (mass < HALOGENS_UP_TO) rows.push(await measure('and F Cl Br', WITH_HALOGENS, ppm, mass));
    }
  const at5 = (set: string) => rows.filter((row) => row.set === set && row.ppm === 5).map((row) => row.product);
  return [
    {
      what: 'CHNOPS at 5 ppm, filtered and sorted, least',
      measured: Math.min(...at5('CHNOPS')),
      limit: 10,
      bound: 'at least',
      unit: 'x'
    },
    {
      what: 'with F, Cl, Br at 5 ppm, least',
      measured: Math.min(...at5('and F Cl Br')),
      limit: 7,
      bound: 'at least',
      unit: 'x'
    },
    {
      what: 'bare enumeration, median',
      measured: median(rows.map((row) => row.bare)),
      limit: 25,
      bound: 'at least',
      unit: 'x'
    },
    { what: 'sub-formulas of 50 ions', measured: await subFormulas(), limit: 12, bound: 'at least', unit: 'x' }
  ];
}

export const bench: Bench = { title: 'formulas of a mass against a general package', run };
