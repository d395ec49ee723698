import { expect, it } from 'vitest';
import type { AnnotatedIon } from '$lib/core/model';
import type { ions } from '../db/schema';
import { constraintsOf, isDecided } from './decided-ions';
import { mergedIon } from './proposal-rows';

type IonRow = typeof ions.$inferSelect;

const row: IonRow = {
  id: 1,
  treeId: 't',
  spectrum: 0,
  position: 0,
  mz: 138.0662,
  intensity: 10,
  scanCount: 2,
  state: 'open',
  formula: null,
  charge: 1,
  errorPpm: null,
  dbe: null,
  oddElectron: null,
  fromMz: null,
  fromFormula: null,
  loss: null,
  lossRadical: false,
  link: null,
  isPrecursor: false,
  flag: null,
  score: null,
  terms: {},
  alternatives: [],
  reason: null,
  decidedBy: null,
  decidedAt: null,
  version: 4
};
const ion: AnnotatedIon = {
  mz: 138.0662,
  intensity: 10,
  formula: 'C6H8N3O',
  charge: 1,
  errorPpm: 0.1,
  dbe: 4.5,
  oddElectron: false,
  fromMz: 195.0877,
  fromFormula: 'C8H11N4O2',
  loss: 'C2H3NO',
  lossRadical: false,
  link: 'measured',
  isPrecursor: false,
  remark: null,
  score: 3,
  terms: { mass: 3 },
  alternatives: Array.from({ length: 20 }, (_, i) => ({
    formula: `C${i + 1}`,
    errorPpm: 0,
    dbe: 0,
    oddElectron: false,
    loss: null,
    score: 0,
    terms: {}
  }))
};

it('proposes for an open ion, with a new version and at most twelve alternatives', () => {
  const merged = mergedIon(row, ion);
  expect(merged).toMatchObject({ state: 'proposed', formula: 'C6H8N3O', loss: 'C2H3NO', version: 5 });
  expect(merged?.alternatives).toHaveLength(12);
});

it('takes a proposal back when nothing is proposed any more', () => {
  const proposed = mergedIon(row, ion)!;
  const open = { ...ion, formula: null, loss: null, alternatives: [] };
  expect(mergedIon(proposed, open)).toMatchObject({ state: 'open', formula: null, version: 6 });
});

it.each([
  ['confirmed', { state: 'confirmed', formula: 'C4H7N2' }],
  ['rejected', { state: 'rejected', formula: null }],
  ['left open on purpose', { state: 'open', decidedAt: new Date(0) }]
] as const)('only refreshes the alternatives of an ion that was %s', (_name, decision) => {
  const decided: IonRow = { ...row, ...decision };
  const merged = mergedIon(decided, ion);
  expect(isDecided(decided)).toBe(true);
  expect({ ...merged, alternatives: [] }).toEqual(decided);
  expect(merged?.alternatives).toHaveLength(12);
});

it('writes nothing where nothing changes', () => expect(mergedIon(mergedIon(row, ion)!, ion)).toBeNull());

it('makes constraints of decisions', () => {
  const at = { spectrum: 2, mz: 100 };
  expect(
    constraintsOf([
      { ...at, state: 'confirmed', formula: 'C4H7N2' },
      { ...at, state: 'rejected', formula: null },
      { ...at, state: 'proposed', formula: 'C3' },
      { ...at, state: 'open', formula: null }
    ])
  ).toEqual([
    { ...at, kind: 'confirmed', formula: 'C4H7N2' },
    { ...at, kind: 'rejected', formula: null }
  ]);
});
