import {
  boolean,
  datetime,
  index,
  int,
  json,
  mysqlEnum,
  mysqlTable,
  primaryKey,
  varchar
} from 'drizzle-orm/mysql-core';
import type { GroupDefaults } from '$lib/schema/group';
import { createdAt, exact, instant, uuid } from './columns';

export const users = mysqlTable('users', {
  id: uuid('id').primaryKey(),
  /** stored in lower case. */
  email: varchar('email', { length: 254 }).notNull().unique(),
  name: varchar('name', { length: 120 }).notNull(),
  passwordHash: exact('password_hash', 255).notNull(),
  createdAt: createdAt()
});

/** lucia's table; the extra columns let a person recognise a session in the list. */
export const sessions = mysqlTable(
  'sessions',
  {
    id: exact('id', 255).primaryKey(),
    userId: uuid('user_id')
      .notNull()
      .references(() => users.id, { onDelete: 'cascade' }),
    expiresAt: datetime('expires_at').notNull(),
    createdAt: createdAt(),
    userAgent: varchar('user_agent', { length: 255 }).notNull().default('')
  },
  (t) => [index('sessions_user').on(t.userId)]
);

export const groups = mysqlTable('groups', {
  id: uuid('id').primaryKey(),
  name: varchar('name', { length: 120 }).notNull(),
  defaults: json('defaults').$type<GroupDefaults>().notNull(),
  version: int('version').notNull().default(1),
  createdAt: createdAt()
});

export const memberships = mysqlTable(
  'memberships',
  {
    groupId: uuid('group_id')
      .notNull()
      .references(() => groups.id, { onDelete: 'cascade' }),
    userId: uuid('user_id')
      .notNull()
      .references(() => users.id, { onDelete: 'cascade' }),
    role: mysqlEnum('role', ['annotator', 'reviewer', 'lead', 'guest']).notNull(),
    createdAt: createdAt()
  },
  (t) => [primaryKey({ columns: [t.groupId, t.userId] }), index('memberships_user').on(t.userId)]
);

/** Single-use links sent by mail. Only the SHA-256 of the secret is stored. */
export const mailTokens = mysqlTable(
  'mail_tokens',
  {
    id: exact('id', 64).primaryKey(),
    kind: mysqlEnum('kind', ['invitation', 'reset']).notNull(),
    email: varchar('email', { length: 254 }).notNull(),
    groupId: uuid('group_id').references(() => groups.id, { onDelete: 'cascade' }),
    role: mysqlEnum('role', ['annotator', 'reviewer', 'lead', 'guest']),
    /** for a guest: the studies opened to them. */
    studyIds: json('study_ids').$type<string[]>(),
    userId: uuid('user_id').references(() => users.id, { onDelete: 'cascade' }),
    createdBy: uuid('created_by').references(() => users.id, { onDelete: 'set null' }),
    expiresAt: instant('expires_at').notNull(),
    usedAt: instant('used_at'),
    revoked: boolean('revoked').notNull().default(false),
    createdAt: createdAt()
  },
  (t) => [index('mail_tokens_group').on(t.groupId)]
);

/** Sliding counters for sign-in and reset, keyed by what is limited (address, account). */
export const rateLimits = mysqlTable('rate_limits', {
  key: exact('key', 200).primaryKey(),
  windowStart: instant('window_start').notNull(),
  hits: int('hits').notNull()
});
