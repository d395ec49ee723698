import {
  bigint,
  boolean,
  double,
  index,
  int,
  json,
  mysqlEnum,
  mysqlTable,
  text,
  uniqueIndex,
  varchar
} from 'drizzle-orm/mysql-core';
import type { FormulaCandidate, IonAlternative, IsolationWindow, ScoreTerms } from '$lib/core/model';
import type { TreeSettings } from '$lib/schema/tree';
import { users } from './accounts';
import { createdAt, exact, instant, mediumblob, uuid } from './columns';
import { runs, studies } from './studies';

export const trees = mysqlTable(
  'trees',
  {
    id: uuid('id').primaryKey(),
    studyId: uuid('study_id')
      .notNull()
      .references(() => studies.id, { onDelete: 'cascade' }),
    runId: uuid('run_id')
      .notNull()
      .references(() => runs.id, { onDelete: 'restrict' }),
    name: varchar('name', { length: 160 }).notNull(),
    precursorMz: double('precursor_mz').notNull(),
    charge: int('charge'),
    polarity: mysqlEnum('polarity', ['positive', 'negative']).notNull(),
    adduct: exact('adduct', 60),
    /** neutral molecular formula chosen (by a person or the first-ranked), Hill order. */
    formula: exact('formula', 120),
    /** true when a person fixed the formula: Suggest then annotates under it. */
    formulaFixed: boolean('formula_fixed').notNull().default(false),
    settings: json('settings').$type<TreeSettings>().notNull(),
    candidates: json('candidates').$type<FormulaCandidate[]>().notNull(),
    notes: json('notes').$type<string[]>().notNull(),
    /** MS1 around the precursor, packed; null without MS1. */
    ms1: mediumblob('ms1'),
    /** share 0..1 of the product ion current explained by confirmed and proposed claims. */
    explained: double('explained').notNull().default(0),
    status: mysqlEnum('status', ['draft', 'in-review', 'changes-asked', 'approved']).notNull().default('draft'),
    /** Schymanski 2014 level claimed for the report, null until a person states it. */
    confidenceLevel: exact('confidence_level', 4),
    /** rises with every change of the tree or of one of its claims. */
    version: int('version').notNull().default(1),
    suggestedAt: instant('suggested_at'),
    createdBy: uuid('created_by').references(() => users.id, { onDelete: 'set null' }),
    createdAt: createdAt(),
    updatedAt: instant('updated_at').notNull()
  },
  (t) => [index('trees_study').on(t.studyId, t.updatedAt), index('trees_run').on(t.runId)]
);

/** A merged spectrum of a tree (TreeSpectrum of the core); its peaks are the rows of `ions`. */
export const treeSpectra = mysqlTable(
  'tree_spectra',
  {
    id: uuid('id').primaryKey(),
    treeId: uuid('tree_id')
      .notNull()
      .references(() => trees.id, { onDelete: 'cascade' }),
    index: int('index').notNull(),
    level: int('level').notNull(),
    path: json('path').$type<number[]>().notNull(),
    /** index of the spectrum it hangs on. */
    parent: int('parent'),
    linkedBy: mysqlEnum('linked_by', ['reference', 'precursor-list', 'filter-string', 'isolated-mz', 'none']).notNull(),
    isolation: json('isolation').$type<IsolationWindow | null>(),
    scanIds: json('scan_ids').$type<string[]>().notNull(),
    activations: json('activations').$type<string[]>().notNull(),
    energies: json('energies').$type<number[]>().notNull(),
    energyUnit: varchar('energy_unit', { length: 4 }),
    analyser: varchar('analyser', { length: 20 }).notNull(),
    timeFirst: double('time_first'),
    timeLast: double('time_last')
  },
  (t) => [uniqueIndex('tree_spectra_index').on(t.treeId, t.index)]
);

/** One ion of one merged spectrum and the claim about it. */
export const ions = mysqlTable(
  'ions',
  {
    id: bigint('id', { mode: 'number' }).autoincrement().primaryKey(),
    treeId: uuid('tree_id')
      .notNull()
      .references(() => trees.id, { onDelete: 'cascade' }),
    spectrum: int('spectrum').notNull(),
    position: int('position').notNull(),
    mz: double('mz').notNull(),
    intensity: double('intensity').notNull(),
    scanCount: int('scan_count').notNull(),
    state: mysqlEnum('state', ['open', 'proposed', 'confirmed', 'rejected']).notNull().default('open'),
    formula: exact('formula', 120),
    charge: int('charge').notNull(),
    errorPpm: double('error_ppm'),
    dbe: double('dbe'),
    oddElectron: boolean('odd_electron'),
    fromMz: double('from_mz'),
    fromFormula: exact('from_formula', 120),
    loss: exact('loss', 120),
    lossRadical: boolean('loss_radical').notNull().default(false),
    link: mysqlEnum('link', ['measured', 'inferred']),
    isPrecursor: boolean('is_precursor').notNull().default(false),
    /** 'isotope', 'above-precursor', 'noise': what the program noticed. */
    flag: varchar('flag', { length: 20 }),
    score: double('score'),
    terms: json('terms').$type<ScoreTerms>().notNull(),
    alternatives: json('alternatives').$type<IonAlternative[]>().notNull(),
    /** why a person left it open, rejected it or chose another formula. */
    reason: text('reason'),
    decidedBy: uuid('decided_by').references(() => users.id, { onDelete: 'set null' }),
    decidedAt: instant('decided_at'),
    version: int('version').notNull().default(1)
  },
  (t) => [uniqueIndex('ions_position').on(t.treeId, t.spectrum, t.position)]
);

/** Every decision on a claim, for the inspector's history and for undo. */
export const claimHistory = mysqlTable(
  'claim_history',
  {
    id: bigint('id', { mode: 'number' }).autoincrement().primaryKey(),
    ionId: bigint('ion_id', { mode: 'number' })
      .notNull()
      .references(() => ions.id, { onDelete: 'cascade' }),
    actorId: uuid('actor_id').references(() => users.id, { onDelete: 'set null' }),
    action: mysqlEnum('action', ['proposed', 'confirmed', 'rejected', 'opened', 'undone']).notNull(),
    /** state and formula before and after. */
    before: json('before').$type<ClaimState>().notNull(),
    after: json('after').$type<ClaimState>().notNull(),
    reason: text('reason'),
    createdAt: createdAt()
  },
  (t) => [index('claim_history_ion').on(t.ionId)]
);

/** The part of an ion that a decision changes. */
export interface ClaimState {
  state: 'open' | 'proposed' | 'confirmed' | 'rejected';
  formula: string | null;
  errorPpm: number | null;
  dbe: number | null;
  oddElectron: boolean | null;
  loss: string | null;
  lossRadical: boolean;
  fromMz: number | null;
  fromFormula: string | null;
  link: 'measured' | 'inferred' | null;
  score: number | null;
  terms: ScoreTerms;
  reason: string | null;
}
