import { z } from 'zod';
import { layoutSchema } from '../../processing/schemas/layout';
import { recipeSchema } from '../../processing/schemas/recipe';
import { setUpSchema, stationSchema } from '../../processing/schemas/set-up';
import { roles } from './roles';

/**
 * What travels between client and server. Ids are made by the client (UUID), so that a repeated request is harmless. Times are
 * ms since 1970-01-01 UTC in numbers named …Ms, or ISO 8601 in UTC. The group's slug is in every address.
 *
 * Address book (G = /api/groups/:group), with what each answers; lists are bare arrays:
 *   GET    /api/health                          → Health           alive, version, demo sign-ins on loopback
 *   GET    /api/me                              → Me               who am I, which groups, which role
 *   GET    G/members                            → Member[]
 *   GET    G/stations                           → StationSummary[] with spines
 *   POST   G/stations                           → 201 StationSummary; body CreateStation; 200 when repeated
 *   GET    G/stations/:station                  → StationSummary   :station is the slug
 *   PATCH  G/stations/:station                  → StationSummary; body changeStationSchema
 *   DELETE G/stations/:station?confirm=WORD     → 204              WORD is the account's confirmWord
 *   GET    G/stations/:station/deletion         → DeletionAccount  what would go and what would stay
 *   GET    G/stations/:station/set-ups          → SetUpRevision[]  newest first, append-only
 *   POST   G/stations/:station/set-ups          → 201 setUpAddedSchema; body AddSetUp; 200 when repeated
 *   GET    G/stations/:station/layouts          → LayoutRevision[] newest first
 *   POST   G/stations/:station/layouts          → 201 LayoutRevision; body saveLayoutSchema; 200 with the existing one when equal
 *   GET    G/stations/:station/raw-files        → RawFile[]
 *   POST   G/stations/:station/raw-files        → 201 Uploaded, 200 for a duplicate; multipart: id, layoutId, then one file;
 *                                                 ?compute=RECIPE_HASH starts a run when all is read
 *   POST   G/stations/:station/raw-files/check  → checkedHashesSchema; which of these hashes are here already
 *   GET    G/raw-files/:id                      → RawFile
 *   POST   G/raw-files/:id/withdraw · /restore  → RawFile
 *   POST   G/raw-files/:id/reread               → RawFile; body rereadSchema
 *   GET    G/raw-files/:id/content              → the bytes as they were brought in
 *   GET    G/recipes                            → RecipeRecord[]
 *   POST   G/recipes                            → 201 RecipeRecord; body saveRecipeSchema; 200 with the existing one when equal
 *   GET    G/stations/:station/runs             → Run[]            newest first
 *   POST   G/stations/:station/runs             → 201 Run; body StartRun; 200 when repeated
 *   GET    G/runs/:id                           → Run
 *   DELETE G/runs/:id?confirm=WORD              → 204
 *   GET    G/runs/:id/deletion                  → DeletionAccount
 *   POST   G/runs/:id/cancel                    → Run
 *   GET    G/runs/:id/series?quantities=a,b&fromMs&toMs  → SeriesData
 *   GET    G/runs/:id/periods?fromMs&toMs       → PeriodRow[]
 *   GET    G/runs/:id/periods/:startMs          → PeriodDetail
 *   GET    G/runs/:id/export?format=exchange|plain&fromMs&toMs  → text/csv as an attachment
 *   GET    G/stations/:station/spine?run&fromMs&toMs&bins       → SpineData
 *   GET    G/jobs                               → Jobs             what is working or waiting
 *   GET    G/events                             server-sent events, each one GroupEvent as JSON in `data`
 */

export const idSchema = z.uuid();
const ms = z.number();
const hash = z.string().regex(/^[0-9a-f]{64}$/);
const author = z.object({ id: z.string(), name: z.string() });

// ------------------------------------------------------------------------------------------------------------ me, members

export const meSchema = z.object({
  user: z.object({ id: z.string(), name: z.string(), email: z.string() }),
  groups: z.array(z.object({ slug: z.string(), name: z.string(), role: z.enum(roles) })),
});
export type Me = z.infer<typeof meSchema>;

export const healthSchema = z.object({
  status: z.enum(['starting', 'ready']),
  version: z.string(),
  /** Only on loopback, only where demonstration data were seeded. */
  demo: z
    .object({
      signIns: z.array(
        z.object({ role: z.enum(roles), email: z.string(), password: z.string(), name: z.string() }),
      ),
    })
    .nullable(),
  /** What start-up is doing, while it is. */
  progress: z.string().nullable(),
});
export type Health = z.infer<typeof healthSchema>;

export const memberSchema = z.object({
  userId: z.string(),
  name: z.string(),
  email: z.string(),
  role: z.enum(roles),
});
export type Member = z.infer<typeof memberSchema>;

// ------------------------------------------------------------------------------------------------------------ stations

export const setUpRevisionSchema = z.object({
  id: idSchema,
  revision: z.number().int(),
  hash,
  setUp: setUpSchema,
  why: z.string(),
  author,
  createdAtMs: ms,
});
export type SetUpRevision = z.infer<typeof setUpRevisionSchema>;

/** Coverage and grades binned over time, for the spine. */
export const spineSchema = z.object({
  fromMs: ms,
  toMs: ms,
  /** Width of one bin [ms]. */
  binMs: ms,
  /** Share of the bin with recorded scans, 0–1. */
  recorded: z.array(z.number()),
  /** Which flux the grades are of. */
  gradedFlux: z.string(),
  /** Shares of the bin's periods, 0–1 each; the rest is missing or not computed. */
  good: z.array(z.number()),
  usable: z.array(z.number()),
  rejected: z.array(z.number()),
  setUpChangesMs: z.array(ms),
  runId: idSchema.nullable(),
});
export type SpineData = z.infer<typeof spineSchema>;

const gradeCounts = z.object({
  good: z.number(),
  usable: z.number(),
  rejected: z.number(),
  missing: z.number(),
});
export const gradeSharesSchema = z.record(z.string(), gradeCounts);

export const stationSummarySchema = z.object({
  id: idSchema,
  systemId: idSchema,
  station: stationSchema,
  setUp: setUpRevisionSchema.nullable(),
  rawFiles: z.number().int(),
  firstScanMs: ms.nullable(),
  lastScanMs: ms.nullable(),
  latestRun: z
    .object({
      id: idSchema,
      number: z.number().int(),
      state: z.string(),
      recipeName: z.string(),
      stale: z.boolean(),
      grades: gradeSharesSchema,
    })
    .nullable(),
  spine: spineSchema.nullable(),
});
export type StationSummary = z.infer<typeof stationSummarySchema>;

export const createStationSchema = z.object({
  id: idSchema,
  systemId: idSchema,
  setUpId: idSchema,
  station: stationSchema,
  setUp: setUpSchema,
});
export type CreateStation = z.infer<typeof createStationSchema>;

export const changeStationSchema = z.object({
  name: stationSchema.shape.name.optional(),
  description: z.string().max(500).optional(),
});

export const addSetUpSchema = z.object({
  id: idSchema,
  setUp: setUpSchema,
  /** Why this revision was made; shown wherever it matters. */
  why: z.string().trim().min(3).max(500),
});
export type AddSetUp = z.infer<typeof addSetUpSchema>;

/** Answer to adding a set-up: which runs are stale now. */
export const setUpAddedSchema = z.object({ revision: setUpRevisionSchema, staleRuns: z.array(idSchema) });

/** What a deletion takes and what it leaves, before it happens. */
export const deletionAccountSchema = z.object({
  what: z.string(),
  goes: z.array(z.object({ label: z.string(), count: z.number().int(), bytes: z.number().nullable() })),
  stays: z.array(z.string()),
  /** Typed by the person to confirm. */
  confirmWord: z.string(),
});
export type DeletionAccount = z.infer<typeof deletionAccountSchema>;

// ------------------------------------------------------------------------------------------------------------ layouts, raw files

export const layoutRevisionSchema = z.object({
  id: idSchema,
  revision: z.number().int(),
  hash,
  layout: layoutSchema,
  author,
  createdAtMs: ms,
});
export type LayoutRevision = z.infer<typeof layoutRevisionSchema>;
export const saveLayoutSchema = z.object({ id: idSchema, layout: layoutSchema });

export const rawFileStates = ['stored', 'reading', 'read', 'unreadable', 'withdrawn'] as const;
export const rawFileSchema = z.object({
  id: idSchema,
  fileName: z.string(),
  sha256: hash,
  contentHash: hash.nullable(),
  bytes: z.number(),
  state: z.enum(rawFileStates),
  layoutId: idSchema,
  layoutName: z.string(),
  rows: z.number().nullable(),
  badRows: z.number().nullable(),
  firstScanMs: ms.nullable(),
  lastScanMs: ms.nullable(),
  warnings: z.array(z.object({ code: z.string(), message: z.string() })),
  /** For unreadable: what happened, what is safe, what to do. */
  problem: z.string().nullable(),
  /** A grown file that begins with all of this one. */
  supersededBy: idSchema.nullable(),
  author,
  createdAtMs: ms,
});
export type RawFile = z.infer<typeof rawFileSchema>;

/** Multipart fields beside the file itself, sent before it: id, layoutId. */
export const uploadFieldsSchema = z.object({ id: idSchema, layoutId: idSchema });
export const uploadedSchema = z.object({ rawFile: rawFileSchema, duplicate: z.boolean() });
export type Uploaded = z.infer<typeof uploadedSchema>;

/** Reads a file again, with another layout when one is given. */
export const rereadSchema = z.object({ layoutId: idSchema.optional() });

export const checkHashesSchema = z.object({ sha256: z.array(hash).max(2000) });
export const checkedHashesSchema = z.object({
  present: z.array(z.object({ sha256: hash, rawFileId: idSchema })),
});

// ------------------------------------------------------------------------------------------------------------ recipes, runs

export const recipeRecordSchema = z.object({
  hash,
  recipe: recipeSchema,
  author: author.nullable(),
  createdAtMs: ms,
  isDefault: z.boolean(),
});
export type RecipeRecord = z.infer<typeof recipeRecordSchema>;
export const saveRecipeSchema = z.object({ recipe: recipeSchema });

export const runStates = ['waiting', 'reading', 'computing', 'done', 'failed', 'cancelled'] as const;
export const runSchema = z.object({
  id: idSchema,
  /** Counts up per group; people say "run 41". */
  number: z.number().int(),
  stationSlug: z.string(),
  recipeHash: hash,
  recipeName: z.string(),
  fromMs: ms,
  toMs: ms,
  /** Asked for all that was recorded: computed again, it takes in what came since. */
  everything: z.boolean().optional(),
  state: z.enum(runStates),
  periodsTotal: z.number().int(),
  periodsDone: z.number().int(),
  manifestHash: hash.nullable(),
  softwareVersion: z.string(),
  resultHash: hash.nullable(),
  /** Set when something it was made from has been corrected since: what. */
  stale: z.array(z.string()),
  problem: z.string().nullable(),
  grades: gradeSharesSchema,
  author,
  createdAtMs: ms,
  finishedAtMs: ms.nullable(),
});
export type Run = z.infer<typeof runSchema>;

export const startRunSchema = z.object({
  id: idSchema,
  recipeHash: hash,
  /** null: everything that was recorded. */
  fromMs: ms.nullable(),
  toMs: ms.nullable(),
});
export type StartRun = z.infer<typeof startRunSchema>;

/** What is working or waiting in a group. */
export const jobsSchema = z.object({ rawFiles: z.array(rawFileSchema), runs: z.array(runSchema) });
export type Jobs = z.infer<typeof jobsSchema>;

// ------------------------------------------------------------------------------------------------------------ results

export const reasonSchema = z.object({
  key: z.string(),
  step: z.string(),
  fluxes: z.array(z.string()),
  series: z.string().nullable(),
  grade: z.union([z.literal(0), z.literal(1), z.literal(2)]),
  statistic: z.object({ label: z.string(), value: z.number().nullable(), unit: z.string() }),
  limits: z.object({
    softLow: z.number().nullable(),
    softHigh: z.number().nullable(),
    hardLow: z.number().nullable(),
    hardHigh: z.number().nullable(),
  }),
  finding: z.string(),
  sentence: z.string(),
  atS: z.number().nullable().optional(),
});

export const fluxGradeSchema = z.object({
  grade: z.number().nullable(),
  ssitc: z.number().nullable(),
  class9: z.number().nullable(),
  decidedBy: z.array(z.string()),
});

/** A period in a list: values of the main quantities and grades, without ledger and curves. */
export const periodRowSchema = z.object({
  startMs: ms,
  endMs: ms,
  outcome: z.enum(['computed', 'partial', 'stopped', 'empty', 'crossing']),
  values: z.record(z.string(), z.number().nullable()),
  grades: z.record(z.string(), fluxGradeSchema),
  /** Finding of the reason that decides each flux's grade, for the table. */
  mainFinding: z.record(z.string(), z.string().nullable()),
});
export type PeriodRow = z.infer<typeof periodRowSchema>;

export const periodDetailSchema = periodRowSchema.extend({
  reasons: z.array(reasonSchema),
  ledger: z.array(
    z.object({
      step: z.string(),
      version: z.number(),
      parameters: z.record(z.string(), z.union([z.number(), z.string(), z.boolean(), z.null()])),
      counts: z.record(z.string(), z.object({ before: z.number(), after: z.number() })).optional(),
      changes: z.record(z.string(), z.union([z.number(), z.string(), z.null()])),
      summary: z.string(),
    }),
  ),
  curves: z.record(
    z.string(),
    z.object({ x: z.array(z.number()), y: z.array(z.number()), xUnit: z.string(), yUnit: z.string() }),
  ),
  rawFiles: z.array(z.object({ id: z.string(), fileName: z.string() })),
  previousStartMs: ms.nullable(),
  nextStartMs: ms.nullable(),
});
export type PeriodDetail = z.infer<typeof periodDetailSchema>;

/** Columns for plotting, one entry per period, in inner units of the catalogue. */
export const seriesSchema = z.object({
  runId: idSchema,
  startMs: z.array(ms),
  endMs: z.array(ms),
  quantities: z.record(z.string(), z.array(z.number().nullable())),
  grades: z.record(z.string(), z.array(z.number().nullable())),
  /** True values of invented demonstration records, when they are known: quantity → column. */
  truth: z.record(z.string(), z.array(z.number().nullable())).nullable(),
});
export type SeriesData = z.infer<typeof seriesSchema>;

// ------------------------------------------------------------------------------------------------------------ events

export const eventSchema = z.discriminatedUnion('type', [
  z.object({
    type: z.literal('raw-file'),
    stationSlug: z.string(),
    rawFile: rawFileSchema,
    share: z.number().nullable(),
  }),
  z.object({ type: z.literal('run'), stationSlug: z.string(), run: runSchema }),
  /** Periods of a run that were just computed. */
  z.object({
    type: z.literal('periods'),
    stationSlug: z.string(),
    runId: idSchema,
    periods: z.array(periodRowSchema),
  }),
  z.object({
    type: z.literal('station'),
    stationSlug: z.string(),
    change: z.enum(['created', 'changed', 'deleted']),
  }),
  z.object({ type: z.literal('resync') }),
]);
export type GroupEvent = z.infer<typeof eventSchema>;
