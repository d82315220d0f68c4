import type { AnyPgColumn } from 'drizzle-orm/pg-core';
import {
  bigint,
  boolean,
  doublePrecision,
  index,
  integer,
  jsonb,
  pgTable,
  text,
  timestamp,
  uniqueIndex,
  uuid,
} from 'drizzle-orm/pg-core';
import { organization, user } from './auth';

/**
 * What people wrote and brought in. Documents (station, set-up, layout, report) are kept whole as JSON and checked by their zod schema
 * on the way in. Instants of records are ms since 1970-01-01 UTC; a scan may begin between two whole milliseconds.
 */

export const bornAt = () =>
  timestamp('created_at', { withTimezone: true, precision: 3, mode: 'date' }).notNull().defaultNow();
export const groupOf = () =>
  text('group_id')
    .notNull()
    .references(() => organization.id);
export const madeBy = () =>
  text('created_by')
    .notNull()
    .references(() => user.id);

export const stations = pgTable(
  'stations',
  {
    id: uuid('id').primaryKey(),
    groupId: groupOf(),
    slug: text('slug').notNull(),
    station: jsonb('station').$type<unknown>().notNull(),
    createdBy: madeBy(),
    createdAt: bornAt(),
  },
  (t) => [uniqueIndex('stations_slug').on(t.groupId, t.slug)],
);

export const systems = pgTable(
  'systems',
  {
    id: uuid('id').primaryKey(),
    groupId: groupOf(),
    stationId: uuid('station_id')
      .notNull()
      .references(() => stations.id, { onDelete: 'cascade' }),
    name: text('name').notNull(),
    createdBy: madeBy(),
    createdAt: bornAt(),
  },
  (t) => [uniqueIndex('systems_name').on(t.stationId, t.name)],
);

export const setUpRevisions = pgTable(
  'set_up_revisions',
  {
    id: uuid('id').primaryKey(),
    groupId: groupOf(),
    systemId: uuid('system_id')
      .notNull()
      .references(() => systems.id, { onDelete: 'cascade' }),
    revision: integer('revision').notNull(),
    hash: text('hash').notNull(),
    validFromMs: bigint('valid_from_ms', { mode: 'number' }).notNull(),
    setUp: jsonb('set_up').$type<unknown>().notNull(),
    why: text('why').notNull(),
    createdBy: madeBy(),
    createdAt: bornAt(),
  },
  (t) => [uniqueIndex('set_up_revisions_number').on(t.systemId, t.revision)],
);

export const layoutRevisions = pgTable(
  'layout_revisions',
  {
    id: uuid('id').primaryKey(),
    groupId: groupOf(),
    systemId: uuid('system_id')
      .notNull()
      .references(() => systems.id, { onDelete: 'cascade' }),
    revision: integer('revision').notNull(),
    hash: text('hash').notNull(),
    layout: jsonb('layout').$type<unknown>().notNull(),
    createdBy: madeBy(),
    createdAt: bornAt(),
  },
  (t) => [uniqueIndex('layout_revisions_number').on(t.systemId, t.revision)],
);

export const rawFiles = pgTable(
  'raw_files',
  {
    id: uuid('id').primaryKey(),
    groupId: groupOf(),
    systemId: uuid('system_id')
      .notNull()
      .references(() => systems.id, { onDelete: 'cascade' }),
    /** As the person's device named it: shown, never used as a path. */
    fileName: text('file_name').notNull(),
    sha256: text('sha256').notNull(),
    bytes: bigint('bytes', { mode: 'number' }).notNull(),
    packed: boolean('packed').notNull(),
    /** SHA-256 and length of the unpacked content, and SHA-256 of its first bytes. */
    contentHash: text('content_hash').notNull(),
    contentBytes: bigint('content_bytes', { mode: 'number' }).notNull(),
    headHash: text('head_hash').notNull(),
    /** stored, reading, read, unreadable; whether it is withdrawn stands apart, so that bringing back restores what was known. */
    state: text('state').notNull(),
    layoutId: uuid('layout_id')
      .notNull()
      .references(() => layoutRevisions.id),
    /** Hash of the layout its chunks were made with; null while there are none. */
    readWithLayoutHash: text('read_with_layout_hash'),
    /** Name of the folder that holds them; every reading makes one of its own. */
    chunkFolder: text('chunk_folder'),
    report: jsonb('report').$type<unknown>(),
    rows: bigint('rows', { mode: 'number' }),
    badRows: bigint('bad_rows', { mode: 'number' }),
    firstScanMs: doublePrecision('first_scan_ms'),
    lastScanMs: doublePrecision('last_scan_ms'),
    problem: text('problem'),
    supersededBy: uuid('superseded_by').references((): AnyPgColumn => rawFiles.id, { onDelete: 'set null' }),
    /** A recipe that the one who brought it in asked to compute as soon as it is read. */
    computeRecipeHash: text('compute_recipe_hash'),
    withdrawnAt: timestamp('withdrawn_at', { withTimezone: true, precision: 3, mode: 'date' }),
    withdrawnBy: text('withdrawn_by').references(() => user.id),
    createdBy: madeBy(),
    createdAt: bornAt(),
  },
  (t) => [
    uniqueIndex('raw_files_bytes').on(t.systemId, t.sha256),
    uniqueIndex('raw_files_content').on(t.systemId, t.contentHash),
    index('raw_files_object').on(t.sha256),
    index('raw_files_state').on(t.state),
  ],
);
