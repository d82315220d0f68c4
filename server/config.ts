import { isAbsolute, join } from 'node:path';
import { z } from 'zod';
import { projectRoot } from './paths';

const GIB = 1024 ** 3;

const flag = z
  .enum(['0', '1'])
  .optional()
  .transform((value) => (value === undefined ? undefined : value === '1'));

const environmentSchema = z.object({
  PORT: z.coerce.number().int().min(0).max(65535).default(4310),
  HOST: z.string().min(1).default('127.0.0.1'),
  /** The data folder; relative to the project. */
  GUSTBOOK_DATA: z.string().min(1).default('.gustbook/data'),
  /** Where rebuilt things are kept between starts, such as the prepared database. */
  GUSTBOOK_CACHE: z.string().min(1).default('.gustbook/cache'),
  /** PostgreSQL; without it the embedded database in the data folder. */
  DATABASE_URL: z.url({ protocol: /^postgres(ql)?$/ }).optional(),
  GUSTBOOK_DEMO: flag,
  /** Address that people use, when it is not http://HOST:PORT. */
  GUSTBOOK_URL: z.url({ protocol: /^https?$/ }).optional(),
  /** First group and its lead on an empty data folder without demonstration; the lead chooses a password by the link in the outbox. */
  GUSTBOOK_FIRST_GROUP: z.string().trim().min(1).max(80).optional(),
  GUSTBOOK_FIRST_LEAD: z.email().optional(),
  GUSTBOOK_MAX_UPLOAD_BYTES: z.coerce
    .number()
    .int()
    .positive()
    .default(4 * GIB),
  /** A packed file may unpack to this much at most, and to at most this many times its own size. */
  GUSTBOOK_MAX_UNPACKED_BYTES: z.coerce
    .number()
    .int()
    .positive()
    .default(32 * GIB),
  GUSTBOOK_MAX_EXPANSION: z.coerce.number().positive().default(200),
  GUSTBOOK_MAX_FILES_PER_SYSTEM: z.coerce.number().int().positive().default(200_000),
  GUSTBOOK_WORKERS: z.coerce.number().int().min(1).max(64).optional(),
  /** Where the development client is served from. */
  GUSTBOOK_DEV_ORIGIN: z.url({ protocol: /^http$/, hostname: /^(localhost|127\.0\.0\.1)$/ }).optional(),
  /** A file for the log; without it the log goes to standard output. */
  GUSTBOOK_LOG_FILE: z.string().min(1).optional(),
  LOG_LEVEL: z.enum(['fatal', 'error', 'warn', 'info', 'debug', 'trace', 'silent']).default('info'),
});

export interface Config {
  port: number;
  host: string;
  dataFolder: string;
  cacheFolder: string;
  databaseUrl: string | null;
  /** Whether an empty data folder is filled with the invented demonstration. */
  demo: boolean;
  publicUrl: string | null;
  first: { groupName: string; leadEmail: string } | null;
  maxUploadBytes: number;
  maxUnpackedBytes: number;
  maxExpansion: number;
  maxFilesPerSystem: number;
  workers: number | null;
  devOrigin: string | null;
  logLevel: string;
  logFile: string | null;
}

export function isLoopbackHost(host: string): boolean {
  return host === 'localhost' || host === '::1' || /^127\./.test(host);
}

/** @throws Error that names each variable that is wrong, and why */
export function readConfig(environment: Record<string, string | undefined>): Config {
  const parsed = environmentSchema.safeParse(environment);
  if (!parsed.success) {
    const lines = parsed.error.issues.map((issue) => `  ${issue.path.join('.')}: ${issue.message}`);
    throw new Error(`The settings in the environment cannot be used:\n${lines.join('\n')}`);
  }
  const env = parsed.data;
  if ((env.GUSTBOOK_FIRST_GROUP === undefined) !== (env.GUSTBOOK_FIRST_LEAD === undefined)) {
    throw new Error('GUSTBOOK_FIRST_GROUP and GUSTBOOK_FIRST_LEAD belong together: set both or neither.');
  }
  const loopback = isLoopbackHost(env.HOST);
  if (env.GUSTBOOK_DEMO && !loopback) {
    throw new Error(
      'GUSTBOOK_DEMO=1 works on loopback only (HOST=127.0.0.1): the demonstration has passwords that everybody knows.',
    );
  }
  const absolute = (path: string) => (isAbsolute(path) ? path : join(projectRoot, path));
  return {
    port: env.PORT,
    host: env.HOST,
    dataFolder: absolute(env.GUSTBOOK_DATA),
    cacheFolder: absolute(env.GUSTBOOK_CACHE),
    databaseUrl: env.DATABASE_URL ?? null,
    demo: (env.GUSTBOOK_DEMO ?? env.GUSTBOOK_FIRST_GROUP === undefined) && loopback,
    publicUrl: env.GUSTBOOK_URL ?? null,
    first:
      env.GUSTBOOK_FIRST_GROUP && env.GUSTBOOK_FIRST_LEAD
        ? { groupName: env.GUSTBOOK_FIRST_GROUP, leadEmail: env.GUSTBOOK_FIRST_LEAD }
        : null,
    maxUploadBytes: env.GUSTBOOK_MAX_UPLOAD_BYTES,
    maxUnpackedBytes: env.GUSTBOOK_MAX_UNPACKED_BYTES,
    maxExpansion: env.GUSTBOOK_MAX_EXPANSION,
    maxFilesPerSystem: env.GUSTBOOK_MAX_FILES_PER_SYSTEM,
    workers: env.GUSTBOOK_WORKERS ?? null,
    devOrigin: env.GUSTBOOK_DEV_ORIGIN ?? null,
    logLevel: env.LOG_LEVEL,
    logFile: env.GUSTBOOK_LOG_FILE === undefined ? null : absolute(env.GUSTBOOK_LOG_FILE),
  };
}
