import PgBoss from 'pg-boss';
import type { Database } from '../../db/client';
import type { Log } from '../log';
import type { Jobs } from './jobs';

/**
 * The queue: pg-boss over the same database. A job says only which row to look at; what is left to do follows from the row, so a job
 * that runs twice, or comes back after a crash, does no harm.
 */

export interface JobHandlers {
  readRawFile(rawFileId: string, isLastTry: boolean, signal: AbortSignal): Promise<void>;
  computeRun(runId: string, isLastTry: boolean, signal: AbortSignal): Promise<void>;
}

const READ = 'read-raw-file';
const COMPUTE = 'compute-run';
const RETRIES = 2;

interface JobData {
  id: string;
}

export class JobQueue implements Jobs {
  private readonly boss: PgBoss;
  private readonly workers = new Map<string, string[]>();
  private readonly stops = new Map<string, AbortController>();
  private readonly working = new Map<string, Promise<void>>();
  private readonly shutdown = new AbortController();

  constructor(
    private readonly database: Database,
    private readonly log: Log,
    /** Files that are read at once. */
    private readonly readers: number,
  ) {
    this.boss = new PgBoss({
      db: { executeSql: (text, values) => database.executeSql(text, values) },
      // Nobody else looks after orphaned jobs of other machines.
      maintenanceIntervalSeconds: 30,
      schedule: false,
      archiveCompletedAfterSeconds: 60 * 60,
      deleteAfterDays: 3,
    });
    this.boss.on('error', (cause) => log.error({ err: cause }, 'job queue'));
  }

  /** Opens the queue. In the embedded database nobody else can be working, so every active job is an orphan and goes back at once. */
  async open(): Promise<void> {
    await this.boss.start();
    for (const name of [READ, COMPUTE]) {
      // A job is only ever lost with its process: the time it may take is bounded by patience, not by a guess.
      const options = { name, retryLimit: RETRIES, retryDelay: 1, expireInHours: 23 };
      if ((await this.boss.getQueue(name)) === null) await this.boss.createQueue(name, options);
      else await this.boss.updateQueue(name, options);
    }
    if (this.database.driver === 'embedded') {
      await this.database.executeSql(
        `update pgboss.job set state = 'retry', start_after = now(), started_on = null
         where state = 'active' and name = any($1)`,
        [[READ, COMPUTE]],
      );
    }
  }

  /**
   * Begins to work, and sends what the rows say is left and no waiting job says.
   */
  async begin(handlers: JobHandlers, left: { rawFileIds: string[]; runIds: string[] }): Promise<void> {
    await this.sendMissing(READ, left.rawFileIds);
    await this.sendMissing(COMPUTE, left.runIds);
    for (let reader = 0; reader < this.readers; reader++) {
      await this.work(READ, (id, isLastTry, signal) => handlers.readRawFile(id, isLastTry, signal));
    }
    await this.work(COMPUTE, (id, isLastTry, signal) => handlers.computeRun(id, isLastTry, signal));
  }

  private async sendMissing(name: string, ids: string[]): Promise<void> {
    if (ids.length === 0) return;
    const { rows } = await this.database.executeSql(
      `select data->>'id' as id from pgboss.job where name = $1 and state in ('created', 'retry', 'active')`,
      [name],
    );
    const waiting = new Set(rows.map((row) => row.id as string));
    for (const id of ids) if (!waiting.has(id)) await this.send(name, id);
  }

  private async work(
    name: string,
    handle: (id: string, isLastTry: boolean, signal: AbortSignal) => Promise<void>,
  ): Promise<void> {
    const worker = await this.boss.work<JobData>(
      name,
      { batchSize: 1, pollingIntervalSeconds: 1, includeMetadata: true },
      async ([job]) => {
        const { id } = job.data;
        // Two jobs about one row do not work at once: the second looks at what the first has left.
        for (let before = this.working.get(id); before !== undefined; before = this.working.get(id)) {
          await before.catch(() => undefined);
        }
        const stop = new AbortController();
        this.stops.set(id, stop);
        const signal = AbortSignal.any([stop.signal, this.shutdown.signal]);
        const work = handle(id, job.retryCount >= job.retryLimit, signal);
        this.working.set(id, work);
        try {
          await work;
        } catch (cause) {
          if (!signal.aborted) this.log.error({ err: cause, job: name, id }, 'job failed');
          throw cause;
        } finally {
          this.working.delete(id);
          this.stops.delete(id);
        }
      },
    );
    this.workers.set(name, [...(this.workers.get(name) ?? []), worker]);
  }

  private async send(name: string, id: string): Promise<void> {
    await this.boss.send(name, { id } satisfies JobData);
    for (const worker of this.workers.get(name) ?? []) this.boss.notifyWorker(worker);
  }

  readRawFile(rawFileId: string): Promise<void> {
    return this.send(READ, rawFileId);
  }

  computeRun(runId: string): Promise<void> {
    return this.send(COMPUTE, runId);
  }

  stopRun(runId: string): void {
    this.stops.get(runId)?.abort(new Error('stopped on request'));
  }

  /** Asks jobs at work to stop; they come back at the next start. */
  async close(deadlineMs: number): Promise<void> {
    this.shutdown.abort(new Error('the server is shutting down'));
    let timer: NodeJS.Timeout | undefined;
    await Promise.race([
      Promise.allSettled(this.working.values()),
      new Promise((resolve) => {
        timer = setTimeout(resolve, deadlineMs);
      }),
    ]);
    clearTimeout(timer);
    await this.boss.stop({ graceful: true, wait: true, timeout: 2000 });
  }
}
