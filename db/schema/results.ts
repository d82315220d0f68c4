import {
  bigint,
  boolean,
  index,
  integer,
  jsonb,
  pgTable,
  primaryKey,
  text,
  timestamp,
  uniqueIndex,
  uuid,
} from 'drizzle-orm/pg-core';
import { organization, user } from './auth';
import { bornAt, groupOf, madeBy, systems } from './records';

export const recipes = pgTable(
  'recipes',
  {
    groupId: groupOf(),
    hash: text('hash').notNull(),
    recipe: jsonb('recipe').$type<unknown>().notNull(),
    /** null for the recipe that every group starts with. */
    createdBy: text('created_by').references(() => user.id),
    createdAt: bornAt(),
  },
  (t) => [primaryKey({ columns: [t.groupId, t.hash] })],
);

export const runs = pgTable(
  'runs',
  {
    id: uuid('id').primaryKey(),
    groupId: groupOf(),
    systemId: uuid('system_id')
      .notNull()
      .references(() => systems.id, { onDelete: 'cascade' }),
    number: integer('number').notNull(),
    recipeHash: text('recipe_hash').notNull(),
    /** As asked for; null: everything that was recorded. */
    askedFromMs: bigint('asked_from_ms', { mode: 'number' }),
    askedToMs: bigint('asked_to_ms', { mode: 'number' }),
    /** As planned: whole periods. */
    fromMs: bigint('from_ms', { mode: 'number' }).notNull(),
    toMs: bigint('to_ms', { mode: 'number' }).notNull(),
    state: text('state').notNull(),
    cancelAsked: boolean('cancel_asked').notNull().default(false),
    periodsTotal: integer('periods_total').notNull().default(0),
    periodsDone: integer('periods_done').notNull().default(0),
    manifest: jsonb('manifest').$type<unknown>(),
    manifestHash: text('manifest_hash'),
    softwareVersion: text('software_version').notNull(),
    resultHash: text('result_hash'),
    grades: jsonb('grades').$type<unknown>().notNull().default({}),
    problem: text('problem'),
    createdBy: madeBy(),
    createdAt: bornAt(),
    finishedAt: timestamp('finished_at', { withTimezone: true, precision: 3, mode: 'date' }),
  },
  (t) => [
    uniqueIndex('runs_number').on(t.groupId, t.number),
    index('runs_system').on(t.systemId),
    index('runs_state').on(t.state),
  ],
);

/** Last number given to a run of a group: numbers of deleted runs are not given again. */
export const runCounters = pgTable('run_counters', {
  groupId: text('group_id')
    .primaryKey()
    .references(() => organization.id),
  last: integer('last').notNull(),
});

export const periods = pgTable(
  'periods',
  {
    runId: uuid('run_id')
      .notNull()
      .references(() => runs.id, { onDelete: 'cascade' }),
    startMs: bigint('start_ms', { mode: 'number' }).notNull(),
    endMs: bigint('end_ms', { mode: 'number' }).notNull(),
    /** The run's manifest it was computed from: a period of another manifest is computed anew. */
    manifestHash: text('manifest_hash').notNull(),
    outcome: text('outcome').notNull(),
    values: jsonb('values').$type<Record<string, number | null>>().notNull(),
    grades: jsonb('grades').$type<unknown>().notNull(),
    /** By flux, the finding that decides its grade: for tables, without reading all reasons. */
    mainFinding: jsonb('main_finding').$type<Record<string, string | null>>().notNull(),
    reasons: jsonb('reasons').$type<unknown>().notNull(),
    ledger: jsonb('ledger').$type<unknown>().notNull(),
    curves: jsonb('curves').$type<unknown>().notNull(),
    /** Content hashes of the raw files that hold scans of it. */
    rawFiles: jsonb('raw_files').$type<string[]>().notNull(),
    /** SHA-256 of the canonical text of the whole result. */
    hash: text('hash').notNull(),
    createdAt: bornAt(),
  },
  (t) => [primaryKey({ columns: [t.runId, t.startMs] })],
);

/** True values of invented demonstration records, by period. */
export const truths = pgTable(
  'truths',
  {
    systemId: uuid('system_id')
      .notNull()
      .references(() => systems.id, { onDelete: 'cascade' }),
    startMs: bigint('start_ms', { mode: 'number' }).notNull(),
    endMs: bigint('end_ms', { mode: 'number' }).notNull(),
    values: jsonb('values').$type<Record<string, number | null>>().notNull(),
    createdBy: madeBy(),
    createdAt: bornAt(),
  },
  (t) => [primaryKey({ columns: [t.systemId, t.startMs] })],
);
