import {
  bigint,
  boolean,
  double,
  index,
  int,
  json,
  mysqlEnum,
  mysqlTable,
  primaryKey,
  text,
  uniqueIndex,
  varchar
} from 'drizzle-orm/mysql-core';
import type { IsolationWindow, RunInfo, RunWarning } from '$lib/core/model';
import { groups, users } from './accounts';
import { createdAt, exact, instant, mediumblob, uuid } from './columns';

export const studies = mysqlTable(
  'studies',
  {
    id: uuid('id').primaryKey(),
    groupId: uuid('group_id')
      .notNull()
      .references(() => groups.id, { onDelete: 'cascade' }),
    name: varchar('name', { length: 160 }).notNull(),
    description: text('description').notNull(),
    version: int('version').notNull().default(1),
    createdBy: uuid('created_by').references(() => users.id, { onDelete: 'set null' }),
    createdAt: createdAt(),
    updatedAt: instant('updated_at').notNull()
  },
  (t) => [index('studies_group').on(t.groupId, t.updatedAt)]
);

/** Which studies a member with the role guest may read. Other roles read all studies of their group. */
export const studyGuests = mysqlTable(
  'study_guests',
  {
    studyId: uuid('study_id')
      .notNull()
      .references(() => studies.id, { onDelete: 'cascade' }),
    userId: uuid('user_id')
      .notNull()
      .references(() => users.id, { onDelete: 'cascade' }),
    createdAt: createdAt()
  },
  (t) => [primaryKey({ columns: [t.studyId, t.userId] })]
);

/** One transfer of one file. The tus server keeps bytes and offset; this row says who may go on with it. */
export const uploads = mysqlTable(
  'uploads',
  {
    id: exact('id', 64).primaryKey(),
    studyId: uuid('study_id')
      .notNull()
      .references(() => studies.id, { onDelete: 'cascade' }),
    userId: uuid('user_id')
      .notNull()
      .references(() => users.id, { onDelete: 'cascade' }),
    fileName: varchar('file_name', { length: 200 }).notNull(),
    bytes: bigint('bytes', { mode: 'number' }).notNull(),
    state: mysqlEnum('state', ['receiving', 'complete', 'cancelled']).notNull().default('receiving'),
    runId: uuid('run_id'),
    createdAt: createdAt()
  },
  (t) => [index('uploads_study').on(t.studyId)]
);

/** One mzML file of a study. Stored under `storageKey`; read by a job. */
export const runs = mysqlTable(
  'runs',
  {
    id: uuid('id').primaryKey(),
    studyId: uuid('study_id')
      .notNull()
      .references(() => studies.id, { onDelete: 'cascade' }),
    fileName: varchar('file_name', { length: 200 }).notNull(),
    storageKey: exact('storage_key', 200).notNull(),
    bytes: bigint('bytes', { mode: 'number' }).notNull(),
    sha1: exact('sha1', 40).notNull(),
    sha256: exact('sha256', 64).notNull(),
    state: mysqlEnum('state', ['waiting', 'reading', 'ready', 'failed']).notNull().default('waiting'),
    info: json('info').$type<RunInfo>(),
    warnings: json('warnings').$type<RunWarning[]>(),
    /** plain words, shown as they are. */
    error: json('error').$type<{ code: string; message: string; cure: string | null }>(),
    uploadedBy: uuid('uploaded_by').references(() => users.id, { onDelete: 'set null' }),
    createdAt: createdAt(),
    readAt: instant('read_at')
  },
  (t) => [index('runs_study').on(t.studyId), index('runs_hash').on(t.studyId, t.sha256)]
);

export const scans = mysqlTable(
  'scans',
  {
    id: bigint('id', { mode: 'number' }).autoincrement().primaryKey(),
    runId: uuid('run_id')
      .notNull()
      .references(() => runs.id, { onDelete: 'cascade' }),
    index: int('index').notNull(),
    nativeId: exact('native_id', 500).notNull(),
    level: int('level').notNull(),
    polarity: mysqlEnum('polarity', ['positive', 'negative']),
    /** seconds */
    time: double('time'),
    totalIonCurrent: double('total_ion_current').notNull(),
    basePeakMz: double('base_peak_mz'),
    basePeakIntensity: double('base_peak_intensity'),
    centroided: boolean('centroided').notNull(),
    peakCount: int('peak_count').notNull(),
    /** the complete ScanHeader of $lib/core/model (precursors, filter string, analyser …) */
    header: json('header').notNull(),
    /** packed centroids: see $lib/server/db/packing.ts */
    peaks: mediumblob('peaks').notNull()
  },
  (t) => [uniqueIndex('scans_run_index').on(t.runId, t.index), index('scans_run_level').on(t.runId, t.level)]
);

/** Precursor ions that a run fragments, found once when it is read (surveyPrecursors of $lib/core/tree). */
export const runPrecursors = mysqlTable(
  'run_precursors',
  {
    id: uuid('id').primaryKey(),
    runId: uuid('run_id')
      .notNull()
      .references(() => runs.id, { onDelete: 'cascade' }),
    position: int('position').notNull(),
    mz: double('mz').notNull(),
    charge: int('charge'),
    isolation: json('isolation').$type<IsolationWindow | null>(),
    /** scans by stage, e.g. {"2": 12, "3": 9} */
    levels: json('levels').$type<Record<string, number>>().notNull(),
    scanIndexes: json('scan_indexes').$type<number[]>().notNull(),
    intensity: double('intensity')
  },
  (t) => [uniqueIndex('run_precursors_run').on(t.runId, t.position)]
);
