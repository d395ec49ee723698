import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { writeMzml, type RunToWrite } from '../lib/core/mzml';

const script = fileURLToPath(new URL('./annotate.ts', import.meta.url));
const folder = mkdtempSync(join(tmpdir(), 'annotate-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function annotate(...args: string[]) {
  const { status, stdout, stderr } = spawnSync(process.execPath, ['--import', 'tsx', script, ...args], {
    encoding: 'utf8'
  });
  return { status, stdout, stderr };
}

/**
 * Caffeine C8H10N4O2: [M+H]+ 195.0877, loss of CH3NCO gives C6H8N3O+ 138.0662, loss of CO from that C5H8N3+ 110.0713.
 * Calculated from the IUPAC/CIAAW monoisotopic masses, electron mass subtracted.
 */
const MZ = { precursor: 195.08765, first: 138.06619, second: 110.07127 };

function caffeine(): RunToWrite {
  const peaks = (...ions: [number, number][]) => ({
    mz: Float64Array.from(ions, (ion) => ion[0]),
    intensity: Float64Array.from(ions, (ion) => ion[1])
  });
  const record = (target: number, spectrumRef: string) => ({
    spectrumRef,
    level: null,
    isolation: { target, lower: 0.5, upper: 0.5 },
    selectedMz: target,
    charge: 1,
    intensity: null,
    activations: ['HCD'],
    energy: 30,
    energyUnit: 'eV' as const
  });
  const common = { polarity: 'positive' as const, analyser: 'orbitrap' as const };
  return {
    id: 'run',
    ionSource: 'ESI',
    scans: [
      { ...common, id: 'scan=1', level: 1, peaks: peaks([MZ.precursor, 1000], [196.0905, 95]) },
      {
        ...common,
        id: 'scan=2',
        level: 2,
        precursors: [record(MZ.precursor, 'scan=1')],
        peaks: peaks([MZ.first, 800], [MZ.precursor, 300])
      },
      {
        ...common,
        id: 'scan=3',
        level: 3,
        precursors: [record(MZ.first, 'scan=2')],
        peaks: peaks([MZ.second, 500], [MZ.first, 100])
      }
    ]
  };
}

const good = join(folder, 'a.mzML');
const zipped = join(folder, 'many', 'b.mzML.gz');
const bad = join(folder, 'many', 'c.mzML');

beforeAll(() => {
  mkdirSync(join(folder, 'many'));
  const file = writeMzml(caffeine());
  writeFileSync(good, file);
  writeFileSync(zipped, gzipSync(file));
  writeFileSync(bad, 'no xml');
});

describe('annotate', { timeout: 120_000 }, () => {
  it('annotates every stage under a given formula, with stages, paths and measured links', () => {
    const { status, stdout } = annotate(good, '--formula', 'C8H10N4O2', '--adduct', '[M+H]+');
    expect(status).toBe(0);
    const result: unknown = JSON.parse(stdout);
    expect(result).toMatchObject({
      format: 'rivenmark-annotation',
      version: 1,
      run: {
        file: 'a.mzML',
        sha1: createHash('sha1').update(writeMzml(caffeine())).digest('hex'),
        polarity: 'positive',
        ionSource: 'ESI',
        analysers: ['orbitrap'],
        scans: { '1': 1, '2': 1, '3': 1 }
      },
      trees: [
        {
          precursorMz: MZ.precursor,
          charge: 1,
          adduct: '[M+H]+',
          formulaCandidates: [{ rank: 1, formula: 'C8H10N4O2', ionFormula: 'C8H11N4O2' }],
          spectra: [
            {
              level: 2,
              path: [MZ.precursor],
              scanIds: ['scan=2'],
              activations: ['HCD'],
              energies: [30],
              ions: [{ formula: 'C6H8N3O', loss: 'C2H3NO' }, { formula: 'C8H11N4O2' }]
            },
            {
              level: 3,
              path: [MZ.precursor, MZ.first],
              ions: [{ mz: MZ.second, formula: 'C5H8N3', fromMz: MZ.first, loss: 'CO', link: 'measured' }, {}]
            }
          ]
        }
      ]
    });
  });

  it('gives the same bytes again, and one line for each file of a folder, errors included', () => {
    const one = annotate(good).stdout;
    expect(annotate(good).stdout).toBe(one);
    const { status, stdout, stderr } = annotate(join(folder, 'many'), good);
    expect(status).toBe(0);
    const lines = stdout.trimEnd().split('\n');
    expect(lines).toHaveLength(3);
    expect(lines[2]).toBe(one.trimEnd());
    expect((JSON.parse(lines[0]) as { trees: unknown }).trees).toEqual((JSON.parse(one) as { trees: unknown }).trees);
    expect(JSON.parse(lines[1])).toMatchObject({
      run: { file: 'c.mzML' },
      error: expect.stringMatching(/not mzML/) as string
    });
    expect(stderr).toContain('c.mzML');
  });

  it('keeps collision energies apart unless asked to merge them', () => {
    const run = caffeine();
    const [survey, low, deeper] = run.scans;
    const high = {
      ...low,
      id: 'scan=4',
      precursors: (low.precursors ?? []).map((entry) => ({ ...entry, energy: 60 }))
    };
    const file = join(folder, 'energies.mzML');
    writeFileSync(file, writeMzml({ ...run, scans: [survey, low, deeper, high] }));
    const energies = (...args: string[]) => {
      const { trees } = JSON.parse(annotate(file, ...args).stdout) as {
        trees: { spectra: { energies: number[] }[] }[];
      };
      return trees[0].spectra.map((spectrum) => spectrum.energies);
    };
    expect(energies('--formula', 'C8H10N4O2')).toEqual([[30], [60], [30]]);
    expect(energies('--formula', 'C8H10N4O2', '--merge-energies')).toEqual([[30, 60], [30]]);
  });

  it('selects one precursor ion and warns when there is none', () => {
    const { status, stdout } = annotate(good, '--precursor-mz', '500');
    expect(status).toBe(0);
    expect(JSON.parse(stdout)).toMatchObject({ trees: [], warnings: [expect.stringContaining('500') as string] });
  });

  it.each([
    [2, [], /No file/],
    [2, [join(folder, 'absent.mzML')], /no file/],
    [2, [good, '--top', 'many'], /--top/],
    [3, [bad], /not mzML.*byte 0/]
  ])('ends with status %i for %j, with one line', (wanted, args, message) => {
    const { status, stdout, stderr } = annotate(...args);
    expect(status).toBe(wanted);
    expect(stdout).toBe('');
    expect(stderr).toMatch(message);
    expect(stderr.trimEnd()).not.toContain('\n');
  });

  it('annotates what a damaged file still holds', () => {
    const file = join(folder, 'cut.mzML');
    const bytes = Buffer.from(writeMzml(caffeine(), { indexed: false }));
    writeFileSync(file, bytes.subarray(0, bytes.lastIndexOf('<binary>')));
    const { status, stdout } = annotate(file, '--formula', 'C8H10N4O2');
    expect(status).toBe(0);
    expect(JSON.parse(stdout)).toMatchObject({
      run: { scans: { '1': 1, '2': 1 } },
      trees: [{ spectra: [{ level: 2 }] }],
      warnings: expect.arrayContaining([expect.stringContaining('ends too early')]) as string[]
    });
  });
});
