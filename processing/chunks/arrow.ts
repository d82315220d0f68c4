import {
  Field,
  Float32,
  Int32,
  makeData,
  MessageReader,
  RecordBatch,
  RecordBatchFileWriter,
  Schema,
  Struct,
  Uint8,
  type Data,
  type DataType,
} from 'apache-arrow';
import { statusChannels, type ChannelKey } from '../schemas/layout';
import type { ChunkColumns, IngestReport } from './chunk';

/**
 * Chunks of one raw file as an Arrow IPC file: one record batch per chunk, `present` as uint8, measurements as float32 (NaN where
 * missing), status as int32. Times stand in the index beside it, not in the file.
 */

/** Beside the chunk file: what the raw file held, and where each batch lies. `batches` runs parallel to `report.chunks`. */
export interface ChunkIndex {
  schema: 'gustbook/chunks/1';
  report: IngestReport;
  /** Position and size in the file [bytes]; size 0 for a part without a scan of its own. */
  batches: { offset: number; byteLength: number }[];
}

const PRESENT = 'present';

function isStatus(channel: ChannelKey): boolean {
  return statusChannels.includes(channel);
}

export function chunkSchema(channels: readonly ChannelKey[], metadata: Record<string, string> = {}): Schema {
  return new Schema(
    [
      new Field(PRESENT, new Uint8(), false),
      ...channels.map(
        (channel) => new Field(channel, isStatus(channel) ? new Int32() : new Float32(), false),
      ),
    ],
    new Map(Object.entries(metadata)),
  );
}

/** Arrow's writer with its bytes going straight to a function, so that no more than one batch is held. */
class PassingWriter extends RecordBatchFileWriter {
  constructor(private readonly pass: (bytes: Uint8Array) => void) {
    super();
  }

  get position(): number {
    return this._position;
  }

  protected override _write(chunk: unknown): this {
    if (!this._started) return this;
    const bytes = ArrayBuffer.isView(chunk)
      ? new Uint8Array(chunk.buffer, chunk.byteOffset, chunk.byteLength)
      : new Uint8Array(chunk as ArrayBuffer);
    if (bytes.byteLength > 0) {
      this.pass(bytes);
      this._position += bytes.byteLength;
    }
    return this;
  }
}

export interface ChunkFileFacts {
  layoutHash: string;
  sampleRateHz: number;
  units: Partial<Record<ChannelKey, string>>;
}

/** Writes a chunk file piece by piece. The bytes handed to `sink` are used again: write or copy them before returning. */
export class ChunkFileEncoder {
  readonly batches: ChunkIndex['batches'] = [];
  readonly #channels: readonly ChannelKey[];
  readonly #schema: Schema;
  readonly #writer: PassingWriter;
  readonly #sink: (bytes: Uint8Array) => void;
  #buffer = new Uint8Array(1 << 16);
  #filled = 0;

  constructor(channels: readonly ChannelKey[], facts: ChunkFileFacts, sink: (bytes: Uint8Array) => void) {
    this.#channels = channels;
    this.#sink = sink;
    this.#schema = chunkSchema(channels, {
      format: 'gustbook/chunks/1',
      layoutHash: facts.layoutHash,
      sampleRateHz: String(facts.sampleRateHz),
      units: JSON.stringify(facts.units),
    });
    this.#writer = new PassingWriter((bytes) => this.#gather(bytes));
    this.#writer.reset(undefined, this.#schema);
    this.#flush();
  }

  add(columns: ChunkColumns): void {
    if (columns.length === 0) {
      this.batches.push({ offset: this.#writer.position, byteLength: 0 });
      return;
    }
    const { length } = columns;
    const children: Data<DataType>[] = [
      makeData({ type: new Uint8(), length, nullCount: 0, data: columns.present }),
      ...this.#channels.map((channel) =>
        isStatus(channel)
          ? makeData({ type: new Int32(), length, nullCount: 0, data: columns.status[channel] })
          : makeData({ type: new Float32(), length, nullCount: 0, data: columns.values[channel] }),
      ),
    ];
    const offset = this.#writer.position;
    this.#makeRoom(length * (4 * children.length + 4) + 64 * children.length + 4096);
    this.#writer.write(
      new RecordBatch(
        this.#schema,
        makeData({ type: new Struct(this.#schema.fields), length, nullCount: 0, children }),
      ),
    );
    this.batches.push({ offset, byteLength: this.#writer.position - offset });
    this.#flush();
  }

  /** @param contentHash of the raw file, known only at its end: it goes into the footer */
  finish(contentHash: string): void {
    this.#schema.metadata.set('contentHash', contentHash);
    this.#writer.close();
    this.#flush();
  }

  #makeRoom(wanted: number): void {
    if (this.#buffer.length >= wanted) return;
    const grown = new Uint8Array(wanted);
    grown.set(this.#buffer.subarray(0, this.#filled));
    this.#buffer = grown;
  }

  #gather(bytes: Uint8Array): void {
    this.#makeRoom(this.#filled + bytes.length);
    this.#buffer.set(bytes, this.#filled);
    this.#filled += bytes.length;
  }

  #flush(): void {
    if (this.#filled > 0) this.#sink(this.#buffer.subarray(0, this.#filled));
    this.#filled = 0;
  }
}

/**
 * One batch of a chunk file, by its bytes alone. The columns are views of `bytes` where these are aligned to 8 bytes, else copies.
 *
 * @param channels of the file's report, in its order
 * @returns null when the bytes are not such a batch (a damaged file)
 */
export function decodeBatch(
  bytes: Uint8Array,
  channels: readonly ChannelKey[],
  chunk: { firstSlot: number; length: number },
): ChunkColumns | null {
  const { firstSlot, length } = chunk;
  const columns: ChunkColumns = { firstSlot, length, present: new Uint8Array(0), values: {}, status: {} };
  if (length === 0) return columns;
  let regions: { offset: number; length: number }[];
  let body: Uint8Array;
  try {
    const reader = new MessageReader(bytes);
    const message = reader.readMessage();
    if (message === null || !message.isRecordBatch()) return null;
    const batch = message.header();
    if (batch.length !== length || batch.nodes.length !== channels.length + 1) return null;
    regions = batch.buffers;
    body = reader.readMessageBody(message.bodyLength);
  } catch {
    return null;
  }
  // Two regions a column: validity (empty: nothing is null) and data.
  const region = (column: number, bytesAValue: number): Uint8Array | null => {
    const { offset } = regions[2 * column + 1];
    if (offset + length * bytesAValue > body.length) return null;
    const view = body.subarray(offset, offset + length * bytesAValue);
    return view.byteOffset % bytesAValue === 0 ? view : view.slice();
  };
  const present = region(0, 1);
  if (present === null) return null;
  columns.present = present;
  for (let c = 0; c < channels.length; c++) {
    const data = region(c + 1, 4);
    if (data === null) return null;
    if (isStatus(channels[c]))
      columns.status[channels[c]] = new Int32Array(data.buffer, data.byteOffset, length);
    else columns.values[channels[c]] = new Float32Array(data.buffer, data.byteOffset, length);
  }
  return columns;
}
