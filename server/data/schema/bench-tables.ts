import { index, integer, json, pgTable, primaryKey, text, timestamp } from 'drizzle-orm/pg-core';
import type { BenchState, ResultSummary } from '../../../shared/contracts/http';
import type { Preset } from '../../../shared/contracts/preset';
import type { ResultFile } from '../../../shared/contracts/result';
import { organization, user } from './auth-tables';

/**
 * Our own tables. Documents are `json`, not `jsonb`: the text is kept as sent, so the order of quantities and the
 * digits of every double survive; jsonb would sort the keys.
 */

const at = (name: string) => timestamp(name, { withTimezone: true, mode: 'date' }).notNull().defaultNow();
const group = () =>
  text('group_id')
    .notNull()
    .references(() => organization.id, { onDelete: 'cascade' });
const maker = () =>
  text('made_by')
    .notNull()
    .references(() => user.id);

export const preset = pgTable(
  'preset',
  {
    id: text('id').primaryKey(),
    groupId: group(),
    study: text('study').notNull(),
    latest: integer('latest').notNull(),
    createdAt: at('created_at'),
    updatedAt: at('updated_at'),
  },
  (table) => [index('preset_group').on(table.groupId, table.updatedAt)],
);

/** Numbered and never changed once written. */
export const presetVersion = pgTable(
  'preset_version',
  {
    presetId: text('preset_id')
      .notNull()
      .references(() => preset.id, { onDelete: 'cascade' }),
    version: integer('version').notNull(),
    body: json('body').$type<Preset>().notNull(),
    madeBy: maker(),
    createdAt: at('created_at'),
  },
  (table) => [primaryKey({ columns: [table.presetId, table.version] })],
);

export const benchSession = pgTable(
  'bench_session',
  {
    id: text('id').primaryKey(),
    groupId: group(),
    madeBy: maker(),
    name: text('name').notNull(),
    study: text('study').notNull(),
    state: json('state').$type<BenchState>().notNull(),
    createdAt: at('created_at'),
    updatedAt: at('updated_at'),
  },
  (table) => [index('bench_session_maker').on(table.groupId, table.madeBy, table.updatedAt)],
);

export const result = pgTable(
  'result',
  {
    id: text('id').primaryKey(),
    groupId: group(),
    madeBy: maker(),
    name: text('name').notNull(),
    study: text('study').notNull(),
    headline: json('headline').$type<ResultSummary['headline']>().notNull(),
    /** The result file without the arrays of its maps. */
    body: json('body').$type<ResultFile>().notNull(),
    createdAt: at('created_at'),
  },
  (table) => [index('result_group').on(table.groupId, table.createdAt)],
);

/** Which file of the map store holds which map of a result. */
export const resultMap = pgTable(
  'result_map',
  {
    resultId: text('result_id')
      .notNull()
      .references(() => result.id, { onDelete: 'cascade' }),
    name: text('name').notNull(),
    /** SHA-256 of the map's JSON. */
    hash: text('hash').notNull(),
    bytes: integer('bytes').notNull(),
  },
  (table) => [primaryKey({ columns: [table.resultId, table.name] }), index('result_map_hash').on(table.hash)],
);
