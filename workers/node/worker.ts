import type { MessagePort } from 'node:worker_threads';
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

/**
 * Several periods, in order, each as JSON: a text crosses to the other thread at a fraction of what its objects cost there.
 * null in place of those that a cancelled task did not come to.
 */
export function compute(task: { requests: ComputeBlockRequest[] } & Cancellable): (string | null)[] {
  return task.requests.map((request) =>
    isRaised(task.cancelFlag) ? null : JSON.stringify(computeBlock(request)),
  );
}

const MEETING_MS = 10_000;

/**
 * Waits until as many threads as there are have come here. A thread that is ended while it still loads its modules takes the whole
 * process down (the runtime aborts), so a pool that is closed lets all of them arrive first.
 */
export function meet({
  arrived,
  threads,
}: {
  arrived: Int32Array<SharedArrayBuffer>;
  threads: number;
}): void {
  Atomics.add(arrived, 0, 1);
  Atomics.notify(arrived, 0);
  const untilMs = performance.now() + MEETING_MS;
  for (;;) {
    const here = Atomics.load(arrived, 0);
    const leftMs = untilMs - performance.now();
    if (here >= threads || leftMs <= 0) return;
    Atomics.wait(arrived, 0, here, leftMs);
  }
}
