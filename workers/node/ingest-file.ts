import { createHash, type Hash } from 'node:crypto';
import { statSync } from 'node:fs';
import { contentHash as hashOf } from '../../processing/canonical';
import type { IngestReport } from '../../processing/chunks/chunk';
import { Ingest } from '../../processing/records/ingest';
import { RecordError, type RecordErrorJson } from '../../processing/records/record-error';
import type { Layout } from '../../processing/schemas/layout';
import { ChunkFileWriter } from './chunk-store';
import { unpackedPieces } from './unpacked-pieces';

export interface IngestFileRequest {
  path: string;
  /** Name the file was brought in under; dates may be taken from it. */
  fileName: string;
  layout: Layout;
  utcOffsetMinutes: number;
  /** Becomes the folder of the file's chunks; whole when a report comes back, gone otherwise. */
  outFolder: string;
  /** Other raw files that this one may begin with: content hash and unpacked size. */
  olderFiles?: { contentHash: string; bytes: number }[];
  /** False for chunks that are thrown away with the process; saves waiting for the disk. */
  isDurable?: boolean;
  /** Stamps later than this are pointed out [ms]. */
  latestPlausibleMs?: number;
}

export interface IngestHooks {
  /** @param share of the file's bytes that are read, 0–1 */
  onProgress?: (share: number, rows: number) => void;
  /** Asked between pieces; true stops the reading and leaves nothing behind. */
  isCancelled?: () => boolean;
}

export type IngestFileResult = { report: IngestReport } | { problem: RecordErrorJson } | { cancelled: true };

/** SHA-256 of bytes, and of their beginnings up to the sizes asked for. */
class PrefixHash {
  readonly beginsWith: string[] = [];
  readonly #hash: Hash = createHash('sha256');
  readonly #waiting: { contentHash: string; bytes: number }[];
  #bytes = 0;

  constructor(older: readonly { contentHash: string; bytes: number }[]) {
    this.#waiting = older.filter((file) => file.bytes > 0).sort((a, b) => a.bytes - b.bytes);
  }

  update(piece: Uint8Array): void {
    let from = 0;
    while (this.#waiting.length > 0 && this.#waiting[0].bytes <= this.#bytes + piece.length - from) {
      const { contentHash, bytes } = this.#waiting[0];
      this.#hash.update(piece.subarray(from, from + bytes - this.#bytes));
      from += bytes - this.#bytes;
      this.#bytes = bytes;
      if (this.#hash.copy().digest('hex') === contentHash) this.beginsWith.push(contentHash);
      this.#waiting.shift();
    }
    this.#hash.update(from === 0 ? piece : piece.subarray(from));
    this.#bytes += piece.length - from;
  }

  digest(): string {
    return this.#hash.digest('hex');
  }
}

/** Reads one raw file under a layout into a folder of chunks. One pass, memory flat. */
export async function ingestFile(
  request: IngestFileRequest,
  hooks: IngestHooks = {},
): Promise<IngestFileResult> {
  const { path, fileName, layout, utcOffsetMinutes, outFolder, olderFiles = [], latestPlausibleMs } = request;
  const channels = layout.columns.map((column) => column.channel);
  const facts = {
    layoutHash: hashOf(layout),
    sampleRateHz: layout.sampleRateHz,
    units: Object.fromEntries(layout.columns.map((column) => [column.channel, column.unit])),
  };
  const writer = new ChunkFileWriter(outFolder, channels, facts, request.isDurable ?? true);
  let isDone = false;
  try {
    const ingest = new Ingest({
      layout,
      fileName,
      utcOffsetMinutes,
      latestPlausibleMs,
      onChunk: (columns) => writer.add(columns),
    });
    const hash = new PrefixHash(olderFiles);
    const size = Math.max(1, statSync(path, { throwIfNoEntry: false })?.size ?? 1);
    let read = 0;
    for await (const piece of unpackedPieces(path, (bytes) => (read = bytes))) {
      if (hooks.isCancelled?.() === true) return { cancelled: true };
      hash.update(piece);
      const problem = ingest.push(piece);
      if (problem !== null) return { problem: problem.toJSON() };
      hooks.onProgress?.(Math.min(1, read / size), ingest.rows);
    }
    const contentHash = hash.digest();
    const result = ingest.finish(
      contentHash,
      hash.beginsWith.filter((older) => older !== contentHash),
    );
    if (result instanceof RecordError) return { problem: result.toJSON() };
    writer.finish(result);
    isDone = true;
    return { report: result };
  } catch (cause) {
    if (cause instanceof RecordError) return { problem: cause.toJSON() };
    throw cause;
  } finally {
    if (!isDone) writer.discard();
  }
}
