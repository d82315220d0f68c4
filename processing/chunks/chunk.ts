import type { ChannelKey } from '../schemas/layout';

/**
 * A chunk: half an hour of aligned samples of ONE raw file, anchored to station standard time, in columns as the file wrote them
 * (units of the layout). Where several raw files hold the same half hour, `assembleBlock` merges their chunks by precedence.
 */

export const CHUNK_MINUTES = 30;

/** Value of a status channel where no scan or no code is. */
export const STATUS_MISSING = -2147483648;

export interface ChunkColumns {
  /** First slot of the half hour that the columns cover. */
  firstSlot: number;
  /** Number of slots covered; every column has this length. */
  length: number;
  /** 1 where a scan was recorded, 0 where none. */
  present: Uint8Array;
  /** NaN where missing. In the file's units. */
  values: Partial<Record<ChannelKey, Float32Array>>;
  /** STATUS_MISSING where missing. */
  status: Partial<Record<ChannelKey, Int32Array>>;
}

/** What happened to the clock inside one chunk of one file. */
export interface ChunkIntake {
  /** Start of the half hour, ms since 1970-01-01 UTC. */
  startMs: number;
  firstSlot: number;
  length: number;
  /** Rows that fell into this half hour. */
  rowsRead: number;
  /** Rows whose slot was already taken; the first stays. */
  duplicates: number;
  /** Steps off the nominal by more than max(0.5 s, 5 scans), forward. */
  clockJumps: number;
  /** Steps back in time. */
  backwardSteps: number;
  /** Largest step off the nominal [s], signed; 0 when none. */
  largestJumpS: number;
  /** 95th percentile of signal strength in the chunk, in the file's unit; null when absent. */
  signalStrengthP95: number | null;
}

/** What one raw file turned out to hold, kept beside its chunks. */
export interface IngestReport {
  schema: 'gustbook/ingest/1';
  contentHash: string;
  /** Bytes of the unpacked content; 0 when not counted. */
  contentBytes: number;
  /** Content hashes of other raw files that this one begins with, byte for byte: it supersedes them. */
  beginsWith: string[];
  layoutHash: string;
  sampleRateHz: number;
  /** Rate of the stamps, gaps and jumps left out [Hz]; null for files without stamps or fewer than 2 rows. */
  fittedRateHz: number | null;
  rows: number;
  /** Rows that could not be read, with the first few examples. */
  badRows: number;
  badRowExamples: { line: number; reason: string }[];
  /** First and last scan, ms UTC (start of scan). */
  firstScanMs: number;
  lastScanMs: number;
  channels: ChannelKey[];
  units: Partial<Record<ChannelKey, string>>;
  /** In the order of the batches of the chunk file; a half hour may come in several parts. */
  chunks: ChunkIntake[];
  warnings: { code: string; message: string }[];
  /** Last line ended without a line break and with too few fields. */
  truncatedLastRow: boolean;
}

/** Number of slots in a half hour at a rate. */
export function slotsPerChunk(sampleRateHz: number): number {
  return Math.round(sampleRateHz * CHUNK_MINUTES * 60);
}

/** Start of the chunk that holds an instant: half hours counted in station standard time. */
export function chunkStartMs(instantMs: number, utcOffsetMinutes: number): number {
  const span = CHUNK_MINUTES * 60_000;
  const offset = utcOffsetMinutes * 60_000;
  return Math.floor((instantMs + offset) / span) * span - offset;
}
