import type { MessagePort } from 'node:worker_threads';
import type { PeriodResult } from '../../processing/state';
import { computeBlock, type ComputeBlockRequest } from './compute-block';
import { ingestFile, type IngestFileRequest, type IngestFileResult } from './ingest-file';

/** What runs on the pool's threads. Tasks are cancelled by raising a flag that both sides share. */

export interface Cancellable {
  cancelFlag: Int32Array<SharedArrayBuffer>;
}

const PROGRESS_EVERY_MS = 100;

function isRaised(flag: Int32Array<SharedArrayBuffer>): boolean {
  return Atomics.load(flag, 0) !== 0;
}

export async function ingest(
  task: { request: IngestFileRequest; progress: MessagePort | null } & Cancellable,
): Promise<IngestFileResult> {
  let lastMs = 0;
  try {
    return await ingestFile(task.request, {
      isCancelled: () => isRaised(task.cancelFlag),
      onProgress: (share, rows) => {
        const nowMs = performance.now();
        if (nowMs - lastMs < PROGRESS_EVERY_MS) return;
        lastMs = nowMs;
        task.progress?.postMessage({ share, rows });
      },
    });
  } finally {
    task.progress?.close();
  }
}

/** Several periods, in order; null in place of those that a cancelled task did not come to. */
export function compute(task: { requests: ComputeBlockRequest[] } & Cancellable): (PeriodResult | null)[] {
  return task.requests.map((request) => (isRaised(task.cancelFlag) ? null : computeBlock(request)));
}
