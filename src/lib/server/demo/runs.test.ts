import { createHash } from 'node:crypto';
import { describe, expect, it } from 'vitest';
import { formatFormula, isSubset, parseFormula, subtract, lossKind } from '$lib/core/chem';
import { readRun } from '$lib/core/mzml';
import { assemble } from '$lib/core/tree';
import { mzOf } from './peaks';
import { chanceOf } from './random';
import { demoFile, precursorFormula } from './runs';
import type { DemoRun } from './scheme';
import { SHORE_RUNS } from './shore-runs';

const sha1 = () => {
  const hash = createHash('sha1');
  return { update: (bytes: Uint8Array) => void hash.update(bytes), hex: () => hash.digest('hex') };
};

async function* whole(bytes: Uint8Array) {
  yield bytes;
}
const read = async (run: DemoRun) => {
  const { scans, summary } = await readRun(whole(demoFile(run, sha1)), { sha1 });
  return { scans, ...summary };
};

const stages = SHORE_RUNS.flatMap((run) =>
  run.compounds.flatMap((compound) => compound.stages.map((stage) => ({ run, compound, stage })))
);

describe('schemes of the demo', () => {
  it('make every product ion a part of the ion that was isolated, by a loss that mechanisms give', () => {
    const wrong = stages.flatMap(({ compound, stage }) => {
      const isolated = parseFormula(stage.path.at(-1) ?? precursorFormula(compound));
      return stage.products
        .filter(({ formula }) => {
          const product = parseFormula(formula);
          return !isSubset(product, isolated) || lossKind(subtract(isolated, product)) === 'implausible';
        })
        .map(({ formula }) => `${formatFormula(isolated)} > ${formula}`);
    });
    expect(wrong).toEqual([]);
  });

  it('isolate only ions that the spectrum above holds', () => {
    const wrong = stages.filter(({ compound, stage }) => {
      if (stage.path.length === 0) return false;
      const above = compound.stages.find(({ path }) => path.join() === stage.path.slice(0, -1).join());
      return !above?.products.some(({ formula }) => formula === stage.path.at(-1));
    });
    expect(wrong).toEqual([]);
  });

  it('start from the ion at m/z 361.1758', () => {
    // C19H25N2O5+: 19·12 + 25·1.00782503190 + 2·14.00307400425 + 5·15.99491461926 − 0.00054857991 (AME2020, CODATA 2018)
    expect(mzOf(SHORE_RUNS[0], precursorFormula(SHORE_RUNS[0].compounds[0]))).toBeCloseTo(361.1758, 4);
  });
});

describe('files of the demo', () => {
  it.each(SHORE_RUNS)('$fileName is read without a warning, with a checksum that fits', async (run) => {
    const { info, warnings, checksum } = await read(run);
    expect(checksum).toBe('ok');
    expect(warnings).toEqual([]);
    expect(info.ionSource).toBe(run.ionSource);
    expect(Number(info.scans['2'])).toBeGreaterThan(20);
  });

  it.each(SHORE_RUNS)('$fileName gives the trees of its scheme', async (run) => {
    const { info, scans } = await read(run);
    const { trees, orphans } = assemble(scans, info);
    expect(orphans).toEqual([]);
    const wanted = run.compounds
      .filter((compound) => compound.stages.length > 0)
      .map((compound) =>
        compound.stages
          .map(({ path }) => [precursorFormula(compound), ...path].map((f) => mzOf(run, f).toFixed(2)))
          .sort()
      );
    const got = trees.map((tree) => tree.spectra.map(({ path }) => path.map((mz) => mz.toFixed(2))).sort());
    expect(got.sort()).toEqual(wanted.sort());
  });

  it('are the same bytes each time', () => {
    expect(Buffer.from(demoFile(SHORE_RUNS[2], sha1)).equals(demoFile(SHORE_RUNS[2], sha1))).toBe(true);
  });

  it('scatter around the true m/z as the scheme says', async () => {
    const run = SHORE_RUNS[0];
    const { scans } = await read(run);
    const mz = mzOf(run, 'C17H21N2O3');
    const errors = scans
      .filter((scan) => scan.level === 2 && scan.precursors[0]?.selectedMz?.toFixed(2) === '361.18')
      .map((scan) => Math.max(...[...scan.peaks.mz].filter((x) => Math.abs(x - mz) < 0.002)))
      .map((found) => ((found - mz) / mz) * 1e6);
    const mean = errors.reduce((a, b) => a + b, 0) / errors.length;
    expect(errors.length).toBeGreaterThan(10);
    expect(Math.abs(mean - run.shift)).toBeLessThan(0.8);
  });
});

describe('the numbers that look random', () => {
  it('are uniform and normal enough, and the same for the same seed', () => {
    const chance = chanceOf(5);
    const uniform = Array.from({ length: 20_000 }, () => chance.uniform());
    const normal = Array.from({ length: 20_000 }, () => chance.normal());
    const mean = (values: number[]) => values.reduce((a, b) => a + b, 0) / values.length;
    expect(mean(uniform)).toBeCloseTo(0.5, 1);
    expect(Math.abs(mean(normal))).toBeLessThan(0.03);
    expect(mean(normal.map((x) => x * x))).toBeCloseTo(1, 1);
    expect(chanceOf(5).uniform()).toBe(uniform[0]);
  });
});
