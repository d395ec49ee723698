import {
  bigint,
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
import { groups, users } from './accounts';
import { createdAt, exact, instant, longtext, uuid } from './columns';
import { studies } from './studies';
import { trees } from './trees';

/** A comment anchored at a tree, a spectrum, an ion or a loss. Replies carry `threadId` of the first remark. */
export const remarks = mysqlTable(
  'remarks',
  {
    id: uuid('id').primaryKey(),
    treeId: uuid('tree_id')
      .notNull()
      .references(() => trees.id, { onDelete: 'cascade' }),
    threadId: uuid('thread_id'),
    anchor: mysqlEnum('anchor', ['tree', 'spectrum', 'ion', 'loss']).notNull(),
    /** index of the spectrum for spectrum, ion and loss anchors. */
    spectrum: int('spectrum'),
    /** row id of the ion for ion and loss anchors (a loss is the edge that leads to that ion). */
    ionId: bigint('ion_id', { mode: 'number' }),
    /** m/z at the time of writing, so that the remark stays readable. */
    mz: double('mz'),
    authorId: uuid('author_id').references(() => users.id, { onDelete: 'set null' }),
    body: text('body').notNull(),
    /** revision under review when it was written, null on a draft. */
    revisionNumber: int('revision_number'),
    resolvedAt: instant('resolved_at'),
    resolvedBy: uuid('resolved_by').references(() => users.id, { onDelete: 'set null' }),
    createdAt: createdAt()
  },
  (t) => [index('remarks_tree').on(t.treeId, t.resolvedAt)]
);

/** A frozen state of a tree. `content` is canonical JSON, `hash` its SHA-256 in hex. */
export const revisions = mysqlTable(
  'revisions',
  {
    id: uuid('id').primaryKey(),
    treeId: uuid('tree_id')
      .notNull()
      .references(() => trees.id, { onDelete: 'cascade' }),
    number: int('number').notNull(),
    treeVersion: int('tree_version').notNull(),
    content: longtext('content').notNull(),
    hash: exact('hash', 64).notNull(),
    status: mysqlEnum('status', ['in-review', 'changes-asked', 'approved', 'superseded', 'withdrawn']).notNull(),
    message: text('message').notNull(),
    createdBy: uuid('created_by').references(() => users.id, { onDelete: 'set null' }),
    createdAt: createdAt(),
    decidedAt: instant('decided_at')
  },
  (t) => [uniqueIndex('revisions_number').on(t.treeId, t.number)]
);

/** One reviewer asked for one revision, and the verdict once given. */
export const reviewRequests = mysqlTable(
  'review_requests',
  {
    id: uuid('id').primaryKey(),
    revisionId: uuid('revision_id')
      .notNull()
      .references(() => revisions.id, { onDelete: 'cascade' }),
    reviewerId: uuid('reviewer_id')
      .notNull()
      .references(() => users.id, { onDelete: 'cascade' }),
    verdict: mysqlEnum('verdict', ['approve', 'ask-for-changes']),
    reason: text('reason'),
    decidedAt: instant('decided_at'),
    createdAt: createdAt()
  },
  (t) => [
    uniqueIndex('review_requests_pair').on(t.revisionId, t.reviewerId),
    index('review_requests_user').on(t.reviewerId)
  ]
);

/** Read-only link to one approved tree or one study, for a reader without an account. */
export const shareLinks = mysqlTable('share_links', {
  /** SHA-256 of the secret in the link. */
  id: exact('id', 64).primaryKey(),
  studyId: uuid('study_id')
    .notNull()
    .references(() => studies.id, { onDelete: 'cascade' }),
  treeId: uuid('tree_id').references(() => trees.id, { onDelete: 'cascade' }),
  createdBy: uuid('created_by').references(() => users.id, { onDelete: 'set null' }),
  expiresAt: instant('expires_at').notNull(),
  revokedAt: instant('revoked_at'),
  createdAt: createdAt()
});

/** Append-only: the migration adds triggers that refuse update and delete. No foreign keys, so that it outlives its subjects. */
export const auditLog = mysqlTable(
  'audit_log',
  {
    id: bigint('id', { mode: 'number' }).autoincrement().primaryKey(),
    groupId: uuid('group_id'),
    actorId: uuid('actor_id'),
    /** name at the time. */
    actorName: varchar('actor_name', { length: 120 }).notNull(),
    /** e.g. 'revision.approved', 'claim.confirmed', 'member.role-changed' */
    action: exact('action', 60).notNull(),
    subjectKind: exact('subject_kind', 30).notNull(),
    subjectId: exact('subject_id', 64).notNull(),
    details: json('details').notNull(),
    createdAt: createdAt()
  },
  (t) => [index('audit_group').on(t.groupId, t.id), index('audit_subject').on(t.subjectKind, t.subjectId)]
);

/** Long work. The row refers to its data, it never holds it. */
export const jobs = mysqlTable(
  'jobs',
  {
    id: uuid('id').primaryKey(),
    kind: mysqlEnum('kind', ['read-run', 'build-trees', 'suggest', 'mail']).notNull(),
    state: mysqlEnum('state', ['queued', 'running', 'done', 'failed', 'cancelled']).notNull().default('queued'),
    groupId: uuid('group_id').references(() => groups.id, { onDelete: 'cascade' }),
    studyId: uuid('study_id').references(() => studies.id, { onDelete: 'cascade' }),
    /** run, tree or mail concerned. */
    subjectId: exact('subject_id', 64).notNull(),
    input: json('input').notNull(),
    progress: json('progress').$type<{ done: number; total: number; what: string }>().notNull(),
    result: json('result'),
    error: json('error').$type<{ code: string; message: string; cure: string | null }>(),
    attempts: int('attempts').notNull().default(0),
    maxAttempts: int('max_attempts').notNull().default(3),
    cancelAsked: int('cancel_asked').notNull().default(0),
    /** process that holds it, and when it last said so. */
    owner: exact('owner', 64),
    heartbeatAt: instant('heartbeat_at'),
    notBefore: instant('not_before'),
    createdBy: uuid('created_by').references(() => users.id, { onDelete: 'set null' }),
    createdAt: createdAt(),
    startedAt: instant('started_at'),
    settledAt: instant('settled_at')
  },
  (t) => [index('jobs_queue').on(t.state, t.createdAt), index('jobs_subject').on(t.subjectId)]
);
