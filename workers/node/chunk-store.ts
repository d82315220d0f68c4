import {
  closeSync,
  fsyncSync,
  mkdirSync,
  openSync,
  readFileSync,
  readSync,
  renameSync,
  rmSync,
  writeFileSync,
  writeSync,
} from 'node:fs';
import { join } from 'node:path';
import {
  ChunkFileEncoder,
  decodeBatch,
  type ChunkFileFacts,
  type ChunkIndex,
} from '../../processing/chunks/arrow';
import type { ChunkColumns, IngestReport } from '../../processing/chunks/chunk';
import type { ChannelKey } from '../../processing/schemas/layout';

const DATA_NAME = 'chunks.arrow';
const INDEX_NAME = 'index.json';

/**
 * Writes the chunks of one raw file into a folder of its own. The index is put in its place last: a folder with an index is whole.
 */
export class ChunkFileWriter {
  readonly #folder: string;
  readonly #fd: number;
  readonly #encoder: ChunkFileEncoder;
  #isOpen = true;

  /** @param isDurable whether chunks must outlive a loss of power */
  constructor(
    folder: string,
    channels: readonly ChannelKey[],
    facts: ChunkFileFacts,
    private readonly isDurable: boolean,
  ) {
    this.#folder = folder;
    mkdirSync(folder, { recursive: true });
    rmSync(join(folder, INDEX_NAME), { force: true });
    this.#fd = openSync(join(folder, DATA_NAME), 'w');
    this.#encoder = new ChunkFileEncoder(channels, facts, (bytes) => {
      for (let at = 0; at < bytes.length;) at += writeSync(this.#fd, bytes, at, bytes.length - at);
    });
  }

  add(columns: ChunkColumns): void {
    this.#encoder.add(columns);
  }

  finish(report: IngestReport): void {
    this.#encoder.finish(report.contentHash);
    if (this.isDurable) fsyncSync(this.#fd);
    this.#close();
    const index: ChunkIndex = { schema: 'gustbook/chunks/1', report, batches: this.#encoder.batches };
    const half = join(this.#folder, `${INDEX_NAME}.half`);
    writeFileSync(half, JSON.stringify(index), { flush: this.isDurable });
    renameSync(half, join(this.#folder, INDEX_NAME));
    if (!this.isDurable) return;
    const folderFd = openSync(this.#folder, 'r');
    fsyncSync(folderFd);
    closeSync(folderFd);
  }

  /** Leaves no chunks behind. */
  discard(): void {
    this.#close();
    rmSync(this.#folder, { recursive: true, force: true });
  }

  #close(): void {
    if (this.#isOpen) closeSync(this.#fd);
    this.#isOpen = false;
  }
}

/** A chunk folder could not be read: it can be made anew from the raw file. */
export class DamagedChunksError extends Error {
  override readonly name = 'DamagedChunksError';
  constructor(
    readonly folder: string,
    reason: string,
  ) {
    super(`chunks in ${folder} cannot be read: ${reason}`);
  }
}

/** Random access to the chunks of one raw file. */
export class ChunkFile {
  readonly report: IngestReport;
  readonly #batches: ChunkIndex['batches'];
  readonly #folder: string;
  readonly #fd: number;

  constructor(folder: string) {
    this.#folder = folder;
    let index: ChunkIndex;
    try {
      index = JSON.parse(readFileSync(join(folder, INDEX_NAME), 'utf8')) as ChunkIndex;
      this.#fd = openSync(join(folder, DATA_NAME), 'r');
    } catch (cause) {
      throw new DamagedChunksError(folder, (cause as Error).message);
    }
    this.report = index.report;
    this.#batches = index.batches;
  }

  /**
   * @param part number of a chunk in `report.chunks`
   * @param reused room for its bytes, when large enough; the columns are views of it
   */
  read(part: number, reused?: ArrayBuffer): ChunkColumns {
    const { offset, byteLength } = this.#batches[part];
    // Aligned to 8 bytes, so that the columns can be views of it.
    const bytes =
      reused !== undefined && reused.byteLength >= byteLength
        ? new Uint8Array(reused, 0, byteLength)
        : new Uint8Array(byteLength);
    for (let at = 0; at < byteLength;) {
      const read = readSync(this.#fd, bytes, at, byteLength - at, offset + at);
      if (read === 0) throw new DamagedChunksError(this.#folder, 'the file ends too early');
      at += read;
    }
    const columns = decodeBatch(bytes, this.report.channels, this.report.chunks[part]);
    if (columns === null) throw new DamagedChunksError(this.#folder, `batch ${part} is no batch`);
    return columns;
  }

  close(): void {
    closeSync(this.#fd);
  }
}

/** Keeps the chunk files used last open, and the chunks read last: neighbours share them through their margins. */
export class ChunkStore {
  readonly #files = new Map<string, ChunkFile>();
  readonly #chunks = new Map<string, { columns: ChunkColumns; turn: number }>();
  #turn = 0;

  constructor(
    private readonly openFiles: number,
    private readonly keptChunks: number,
  ) {}

  file(folder: string): ChunkFile {
    const known = this.#files.get(folder);
    if (known !== undefined) {
      this.#files.delete(folder);
      this.#files.set(folder, known);
      return known;
    }
    const file = new ChunkFile(folder);
    this.#files.set(folder, file);
    if (this.#files.size > this.openFiles) {
      const [oldest, forgotten] = this.#files.entries().next().value as [string, ChunkFile];
      forgotten.close();
      this.#files.delete(oldest);
    }
    return file;
  }

  /** Chunks read before may be overwritten from here on. */
  nextTurn(): void {
    this.#turn++;
  }

  /** The columns are good until the next turn. */
  read(folder: string, part: number): ChunkColumns {
    const key = `${folder}\0${part}`;
    let columns = this.#chunks.get(key)?.columns;
    if (columns === undefined) {
      let reused: ArrayBuffer | undefined;
      const oldest = this.#chunks.entries().next().value;
      if (oldest !== undefined && this.#chunks.size >= this.keptChunks && oldest[1].turn < this.#turn) {
        this.#chunks.delete(oldest[0]);
        reused = oldest[1].columns.present.buffer as ArrayBuffer;
      }
      columns = this.file(folder).read(part, reused);
    }
    this.#chunks.delete(key);
    this.#chunks.set(key, { columns, turn: this.#turn });
    return columns;
  }

  close(): void {
    for (const file of this.#files.values()) file.close();
    this.#files.clear();
    this.#chunks.clear();
  }
}
