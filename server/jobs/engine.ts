import type { WorkerPool } from '../../workers/node/pool';

/** What the server asks of the worker threads; the jobs know only this. */
export type Engine = Pick<WorkerPool, 'ingestFile' | 'computePlanned' | 'close'>;
