import { MessageChannel } from 'node:worker_threads';
import { fileURLToPath } from 'node:url';
import { Piscina } from 'piscina';
import type { IngestReport } from '../../processing/chunks/chunk';
import { crossingPeriod } from '../../processing/pipeline';
import type { RecordErrorJson } from '../../processing/records/record-error';
import { planRun, type PlanFile, type PlannedPeriod, type PlanRequest } from '../../processing/run-plan';
import type { Layout } from '../../processing/schemas/layout';
import type { RecipeSettings } from '../../processing/schemas/recipe';
import type { PeriodResult } from '../../processing/state';
import type { ComputeBlockRequest } from './compute-block';
import type { IngestFileRequest, IngestFileResult } from './ingest-file';

/** Consecutive periods computed by one task: neighbours share chunks through their margins. */
const PERIODS_A_TASK = 2;

/** A raw file whose chunks lie in a folder. */
export interface FileInFolder extends PlanFile {
  report: IngestReport;
  layout: Pick<Layout, 'columns'>;
  chunkFolder: string;
}

export interface PoolOptions {
  /** Heap of one thread [MiB]; a task that needs more fails alone. */
  maxOldGenerationSizeMb?: number;
  /** Bundled worker to run instead of the one beside this code: some test runners cannot start TypeScript threads. */
  workerFile?: string;
}

export interface WorkerPool {
  readonly threads: number;
  /** Reads a raw file into chunks. Rejects with the signal's reason when aborted; nothing is left behind then. */
  ingestFile(
    request: IngestFileRequest,
    options?: { onProgress?: (share: number, rows: number) => void; signal?: AbortSignal },
  ): Promise<{ report: IngestReport } | { problem: RecordErrorJson }>;
  /** The same as JSON texts, for callers that only pass them on. */
  computeTexts<File extends FileInFolder>(
    periods: readonly PlannedPeriod<File>[],
    settings: RecipeSettings,
    onPeriod: (json: string, startMs: number) => void,
    signal?: AbortSignal,
  ): Promise<void>;
  /** Computes planned periods, handing each over once, in any order. Rejects with the signal's reason when aborted. */
  computePlanned<File extends FileInFolder>(
    periods: readonly PlannedPeriod<File>[],
    settings: RecipeSettings,
    onPeriod: (result: PeriodResult) => void,
    signal?: AbortSignal,
  ): Promise<void>;
  /** Plans and computes; see `planRun`. Periods before the first set-up have no result and are left out. */
  computeRun<File extends FileInFolder>(
    request: PlanRequest<File>,
    onPeriod: (result: PeriodResult) => void,
    signal?: AbortSignal,
  ): Promise<void>;
  /** Stops what is under way and ends the threads. */
  close(): Promise<void>;
}

/** The bundled worker lies beside the bundle that this code is in; sources are translated as they are loaded. */
function workerEntry(): string {
  const isSource = import.meta.url.endsWith('.ts');
  return fileURLToPath(new URL(isSource ? './worker-source.mjs' : './worker.mjs', import.meta.url));
}

/** Threads stay alive between tasks: each repeats the warm-up of the compiler. */
export function createPool(threads: number, options: PoolOptions = {}): WorkerPool {
  const { maxOldGenerationSizeMb = 256 } = options;
  const piscina = new Piscina({
    filename: options.workerFile ?? workerEntry(),
    // Not those of this process: the worker brings what it needs.
    execArgv: [],
    minThreads: threads,
    maxThreads: threads,
    idleTimeout: Infinity,
    resourceLimits: { maxOldGenerationSizeMb, maxYoungGenerationSizeMb: 8 },
  });

  const flags = new Set<Int32Array<SharedArrayBuffer>>();
  let isClosing = false;

  /** Runs a task that watches a flag, and raises the flag when the signal asks. */
  async function run<Result>(
    name: string,
    task: object,
    signal: AbortSignal | undefined,
    transferList: readonly MessagePort[] = [],
  ): Promise<Result> {
    signal?.throwIfAborted();
    if (isClosing) throw new Error('The pool is closed.');
    const cancelFlag = new Int32Array(new SharedArrayBuffer(4));
    const raise = (): void => {
      Atomics.store(cancelFlag, 0, 1);
    };
    signal?.addEventListener('abort', raise, { once: true });
    flags.add(cancelFlag);
    try {
      const result = (await piscina.run(
        { ...task, cancelFlag },
        { name, transferList: [...transferList] as never },
      )) as Result;
      signal?.throwIfAborted();
      if (isClosing) throw new Error('The pool was closed before this task was done.');
      return result;
    } finally {
      flags.delete(cancelFlag);
      signal?.removeEventListener('abort', raise);
    }
  }

  const pool: WorkerPool = {
    threads,

    async ingestFile(request, { onProgress, signal } = {}) {
      const channel = onProgress === undefined ? null : new MessageChannel();
      channel?.port1.on('message', ({ share, rows }: { share: number; rows: number }) =>
        onProgress?.(share, rows),
      );
      try {
        const result = await run<IngestFileResult>(
          'ingest',
          { request, progress: channel?.port2 ?? null },
          signal,
          channel === null ? [] : [channel.port2 as unknown as MessagePort],
        );
        if ('cancelled' in result) throw new Error('reading was cancelled without being asked to');
        return result;
      } finally {
        channel?.port1.close();
      }
    },

    async computeTexts(periods, settings, onPeriod, signal) {
      const requests: ComputeBlockRequest[] = [];
      for (const period of periods) {
        if (period.kind === 'crossing')
          onPeriod(
            JSON.stringify(crossingPeriod(period.startMs, period.endMs, period.what, period.atMs)),
            period.startMs,
          );
        if (period.kind !== 'compute') continue;
        const { startMs, endMs, sampleRateHz, marginS, setUp, context, sources } = period;
        requests.push({
          startMs,
          endMs,
          sampleRateHz,
          marginS,
          setUp,
          settings,
          context,
          sources: sources.map(({ file, parts }) => ({
            folder: file.chunkFolder,
            columns: file.layout.columns,
            parts,
          })),
        });
      }
      // As many tasks under way as keep every thread busy; the rest wait here, where they cost nothing.
      let next = 0;
      let hasFailed = false;
      const lane = async (): Promise<void> => {
        while (next < requests.length && !hasFailed) {
          const batch = requests.slice(next, (next += PERIODS_A_TASK));
          const results = await run<(string | null)[]>('compute', { requests: batch }, signal);
          results.forEach((json, i) => {
            if (json !== null) onPeriod(json, batch[i].startMs);
          });
        }
      };
      const lanes = Array.from({ length: threads + 1 }, () =>
        lane().catch((cause: unknown) => {
          hasFailed = true;
          throw cause;
        }),
      );
      // Nothing is handed over any more once this has settled.
      const failure = (await Promise.allSettled(lanes)).find((outcome) => outcome.status === 'rejected');
      if (failure !== undefined) throw failure.reason;
    },

    async computePlanned(periods, settings, onPeriod, signal) {
      await pool.computeTexts(
        periods,
        settings,
        (json) => onPeriod(JSON.parse(json) as PeriodResult),
        signal,
      );
    },

    async computeRun(request, onPeriod, signal) {
      await pool.computePlanned(planRun(request).periods, request.settings, onPeriod, signal);
    },

    async close() {
      isClosing = true;
      for (const flag of flags) Atomics.store(flag, 0, 1);
      const arrived = new Int32Array(new SharedArrayBuffer(4));
      await Promise.allSettled(
        Array.from({ length: threads }, () => piscina.run({ arrived, threads }, { name: 'meet' })),
      );
      await piscina.close({ force: true });
    },
  };
  return pool;
}
