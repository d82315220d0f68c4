/** How routes and services hand work to the queue; what the queue is does not concern them. */
export interface Jobs {
  /** Reads a raw file in the background; called again for the same file it does no harm. */
  readRawFile(rawFileId: string): Promise<void>;
  /** Goes on with a run in the background; called again for the same run it does no harm. */
  computeRun(runId: string): Promise<void>;
  /** Asks a run that is being computed in this process to stop soon. */
  stopRun(runId: string): void;
}
