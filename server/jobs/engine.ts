import type { IngestReport } from '../../processing/chunks/chunk';
import type { RecordErrorJson } from '../../processing/records/record-error';
import type { Layout } from '../../processing/schemas/layout';
import type { RecipeSettings } from '../../processing/schemas/recipe';
import type { SetUp } from '../../processing/schemas/set-up';
import type { PeriodResult } from '../../processing/state';

/**
 * What the server asks of the worker threads. The jobs know only this; `worker-engine.ts` binds it to the pool, and tests of the routes
 * may bind something quicker.
 */
export interface Engine {
  /**
   * Reads a raw file under a layout into chunks; the folder is complete when this resolves with a report.
   *
   * @param onProgress share of the bytes that are read, 0–1
   */
  readRawFile(
    request: ReadRequest,
    onProgress: (share: number) => void,
    signal: AbortSignal,
  ): Promise<{ report: IngestReport } | { problem: RecordErrorJson }>;

  /**
   * Computes periods, in any order, each handed over once. Periods of another call are never touched.
   *
   * @returns when all are done; rejects with the signal's reason when it is aborted
   */
  computePeriods(
    request: ComputeRequest,
    onPeriod: (result: PeriodResult) => void,
    signal: AbortSignal,
  ): Promise<void>;

  close(): Promise<void>;
}

export interface ReadRequest {
  path: string;
  fileName: string;
  layout: Layout;
  utcOffsetMinutes: number;
  outFolder: string;
}

export interface ComputeFile {
  id: string;
  contentHash: string;
  layoutHash: string;
  layout: Layout;
  report: IngestReport;
  chunkFolder: string;
}

export interface ComputeRequest {
  /** In order of precedence. */
  files: ComputeFile[];
  /** In the order of their dates. */
  setUps: { hash: string; validFromMs: number; setUp: SetUp }[];
  settings: RecipeSettings;
  utcOffsetMinutes: number;
  /** The whole run, for statistics that look beyond one period. */
  fromMs: number;
  toMs: number;
  /** Periods to compute now; those that are done already are left out. */
  startsMs: number[];
}
