import { contentHash as hashOf } from '../canonical';
import {
  chunkStartMs,
  CHUNK_MINUTES,
  slotsPerChunk,
  STATUS_MISSING,
  type ChunkColumns,
  type ChunkIntake,
  type IngestReport,
} from '../chunks/chunk';
import { quantile, quantileInPlace } from '../numerics/selection';
import { statusChannels, type ChannelKey, type Layout } from '../schemas/layout';
import { BlockParser, ROWS_PER_BLOCK, type BadRow, type RowBlock } from './block-parser';
import { FIRST_NUMBER_COLUMN } from './kernel';
import { openText, OPENING_BYTES, type Opening } from './opening';
import { fieldsOf } from './preview';
import { RecordError } from './record-error';
import {
  createTimeReader,
  EARLIEST_STAMP_MS,
  LATEST_STAMP_MS,
  timeFields,
  type TimeReader,
} from './time-reader';
import { readUnit, unitForChannel } from './column-names';

const CHUNK_MS = CHUNK_MINUTES * 60_000;

/** Chunks kept open at a time: a clock that is set back by an hour and a half still finds them. */
const OPEN_CHUNKS = 4;

/** Relative difference of rates that is worth a warning, and that makes a file unusable under its layout. */
const RATE_WARNING = 0.001;
const RATE_ERROR = 0.05;

export interface IngestOptions {
  layout: Layout;
  /** Name the file was brought in under; only read where the layout takes a date from it. */
  fileName: string;
  utcOffsetMinutes: number;
  /**
   * Takes a finished chunk. Its arrays are used again afterwards: copy or encode them before returning. A half hour that the file comes
   * back to after its clock was set far back arrives in several parts, in the order of the rows.
   */
  onChunk: (columns: ChunkColumns, intake: ChunkIntake) => void;
  /** Stamps later than this are pointed out (the caller knows what time it is). */
  latestPlausibleMs?: number;
  rowsPerBlock?: number;
}

interface OpenChunk {
  startMs: number;
  present: Uint8Array;
  values: Float32Array[];
  status: Int32Array[];
  intake: Omit<ChunkIntake, 'firstSlot' | 'length' | 'signalStrengthP95' | 'rowsRead'>;
  firstSlot: number;
  lastSlot: number;
  /** Scans in it. */
  placed: number;
}

/** Arrays of chunks that no file uses just now, by their shape: making them anew for each file costs memory that is freed late. */
const spareChunks = new Map<string, OpenChunk[]>();

interface ChannelSource {
  channel: ChannelKey;
  field: number;
  column: number;
}

/** Physical range of a channel's typical value in each unit; outside, the unit is doubted. Wide on purpose (project choice). */
const typicalRanges: Partial<Record<ChannelKey, Record<string, [number, number]>>> = {
  windU: { 'm s-1': [-60, 60], 'cm s-1': [-6000, 6000], 'km h-1': [-216, 216] },
  windV: { 'm s-1': [-60, 60], 'cm s-1': [-6000, 6000], 'km h-1': [-216, 216] },
  windW: { 'm s-1': [-20, 20], 'cm s-1': [-2000, 2000], 'km h-1': [-72, 72] },
  sonicTemperature: { K: [200, 340], degC: [-70, 65], 'm s-1': [280, 380] },
  co2: {
    'mmol m-3': [4, 80],
    'mg m-3': [180, 3500],
    'umol m-3': [4000, 80_000],
    'umol mol-1': [100, 2000],
    'umol mol-1 dry': [100, 2000],
  },
  h2o: {
    'mmol m-3': [-50, 3000],
    'g m-3': [-1, 55],
    'mol m-3': [-0.05, 3],
    'mmol mol-1': [-1, 80],
    'mmol mol-1 dry': [-1, 80],
  },
  airTemperature: { K: [200, 340], degC: [-70, 65] },
  airPressure: { Pa: [30_000, 115_000], hPa: [300, 1150], kPa: [30, 115] },
  signalStrength: { '%': [-1, 130], '1': [-0.01, 1.3] },
};

/**
 * One raw file: bytes in, finished half-hour chunks and a report out. One pass, memory flat whatever the length.
 * Problems of the whole file come back as a `RecordError` value; after one, nothing more is read.
 *
 * @deviates from "last minus first" in the fitted rate: each step counts as its nearest whole number of scans and jumps are left out,
 *   so that a gap or lost rows are not taken for a slow clock
 */
export class Ingest {
  readonly #options: IngestOptions;
  readonly #stepMs: number;
  readonly #slots: number;
  readonly #jumpLimitMs: number;
  readonly #times: Float64Array;
  readonly #slotOf: Int32Array;
  readonly #rowsPerBlock: number;

  #head: Uint8Array | null = new Uint8Array(OPENING_BYTES * 2);
  #headLength = 0;
  #parser: BlockParser | null = null;
  #reader: TimeReader | null = null;
  #opening: Opening | null = null;
  #channels: ChannelSource[] = [];
  #valueChannels: ChannelSource[] = [];
  #statusChannels: ChannelSource[] = [];
  #failure: RecordError | null = null;
  #bytes = 0;

  #open: OpenChunk[] = [];
  readonly #intakes: ChunkIntake[] = [];

  #rows = 0;
  #blocks = 0;
  #timeBadRows = 0;
  #unsetClockRows = 0;
  readonly #timeBadExamples: BadRow[] = [];
  #previousMs = NaN;
  #firstMs = Infinity;
  #lastMs = -Infinity;
  #regularSlots = 0;
  #regularMs = 0;
  #rowsAtOtherRate = 0;
  #otherRate: { line: number; rateHz: number } | null = null;
  #firstBackward: { line: number; stepMs: number } | null = null;
  #futureLine: number | null = null;
  #duplicates = 0;
  #jumps = 0;
  #backward = 0;
  #parts = 0;
  readonly #closedStarts = new Set<number>();
  #coarse: { stepMs: number; groupMs: number; index: number } | null = null;
  readonly #withoutValue = new Set<ChannelKey>();
  readonly #typical = new Map<ChannelKey, number>();
  #work = new Float64Array(0);

  constructor(options: IngestOptions) {
    this.#options = options;
    this.#stepMs = 1000 / options.layout.sampleRateHz;
    this.#slots = slotsPerChunk(options.layout.sampleRateHz);
    this.#jumpLimitMs = Math.max(500, 5 * this.#stepMs);
    this.#rowsPerBlock = options.rowsPerBlock ?? ROWS_PER_BLOCK;
    this.#times = new Float64Array(this.#rowsPerBlock);
    this.#slotOf = new Int32Array(this.#rowsPerBlock);
  }

  /** Rows read so far, for progress. */
  get rows(): number {
    return this.#rows;
  }

  push(bytes: Uint8Array): RecordError | null {
    this.#bytes += bytes.length;
    if (this.#failure !== null) return this.#failure;
    if (this.#parser !== null) return (this.#failure = this.#parser.push(bytes));
    this.#keepHead(bytes);
    if (this.#headLength >= OPENING_BYTES) this.#tryOpen(false);
    return this.#failure;
  }

  /**
   * @param contentHash SHA-256 of the unpacked content, which is known only now
   * @param beginsWith content hashes of other raw files that are the beginning of this one
   */
  finish(contentHash: string, beginsWith: string[] = []): IngestReport | RecordError {
    if (this.#failure === null && this.#parser === null) {
      if (this.#bytes === 0)
        this.#failure = new RecordError('empty-file', {
          message: 'no bytes',
          userMessage:
            'The file is empty. Nothing was lost by bringing it in; check whether the logger or the transfer stopped before anything was written.',
        });
      else this.#tryOpen(true);
    }
    if (this.#failure === null) this.#failure = this.#parser?.finish() ?? null;
    this.#failure ??= this.#verdict();
    if (this.#failure !== null) return this.#failure;
    while (this.#open.length > 0) this.#close(this.#open[0]);
    return this.#report(contentHash, beginsWith);
  }

  // ------------------------------------------------------------------------------------------------------------ opening

  #keepHead(bytes: Uint8Array): void {
    let head = this.#head ?? new Uint8Array(0);
    if (this.#headLength + bytes.length > head.length) {
      const grown = new Uint8Array(Math.max(head.length * 2, this.#headLength + bytes.length));
      grown.set(head.subarray(0, this.#headLength));
      this.#head = head = grown;
    }
    head.set(bytes, this.#headLength);
    this.#headLength += bytes.length;
  }

  #tryOpen(isWhole: boolean): void {
    if (this.#head === null) return;
    const head = this.#head.subarray(0, this.#headLength);
    const { layout, fileName } = this.#options;
    const opening = openText(head, layout, isWhole);
    if (opening === 'more') return;
    if (opening instanceof RecordError) {
      this.#failure = opening;
      return;
    }
    const bound = createTimeReader(layout, fileName, opening.headerLines);
    if ('problem' in bound) {
      this.#failure = new RecordError('no-time', {
        message: bound.problem,
        userMessage: `${bound.problem} The rows have no complete time without it. The file was kept as it is. Correct the pattern in the layout, or the name of the file.`,
      });
      return;
    }
    this.#reader = bound.reader;
    this.#opening = opening;

    const time = timeFields(layout.time);
    const taken = new Set([time.dateText, time.timeText]);
    const clash = layout.columns.find((c) => taken.has(c.index));
    if (clash !== undefined) {
      this.#failure = new RecordError('wrong-columns', {
        message: `column ${clash.index} is both time and ${clash.channel}`,
        userMessage: `Column ${clash.index + 1} is given twice in the layout: as time and as ${clash.name ?? clash.channel}. The file was kept as it is. Correct the column numbers.`,
      });
      return;
    }
    const numberFields = [...new Set([...layout.columns.map((c) => c.index), ...time.numbers])];
    this.#channels = layout.columns.map((c) => ({
      channel: c.channel,
      field: c.index,
      column: FIRST_NUMBER_COLUMN + numberFields.indexOf(c.index),
    }));
    this.#valueChannels = this.#channels.filter((c) => !statusChannels.includes(c.channel));
    this.#statusChannels = this.#channels.filter((c) => statusChannels.includes(c.channel));
    for (const { channel } of this.#channels) this.#withoutValue.add(channel);
    const { resolve } = bound.reader;
    this.#parser = new BlockParser({
      delimiter: layout.delimiter,
      decimal: layout.decimal,
      quoted: layout.quoted,
      newline: opening.newline,
      fieldCount: opening.fieldCount,
      numberFields,
      measuredFields: new Set(
        layout.columns.map((c) => c.index).filter((field) => !time.numbers.includes(field)),
      ),
      codeFields: new Set(this.#statusChannels.map((c) => c.field)),
      dateField: time.dateText,
      timeField: time.timeText,
      missingTokens: layout.missingTokens,
      headerLines: opening.headerLines.length,
      rowsPerBlock: this.#rowsPerBlock,
      resolveTime: resolve,
      onBlock: (block) => this.#takeBlock(block),
    });
    this.#failure = this.#parser.push(head.subarray(opening.bodyOffset));
    this.#head = null;
  }

  // -------------------------------------------------------------------------------------------------------------- rows

  #takeBlock(block: RowBlock): RecordError | null {
    const { rows, columns, lines } = block;
    const times = this.#times;
    const fieldColumn = new Map(
      [...timeFields(this.#options.layout.time).numbers].map((field) => [field, this.#columnOf(field)]),
    );
    this.#reader?.fill(times, 0, rows, columns, (field) => fieldColumn.get(field) ?? 0, block.ordinals);
    if (this.#blocks === 0) this.#findCoarseStamps(rows);
    if (this.#coarse !== null) this.#spreadCoarse(rows);
    const rateFailure = this.#checkRate(rows, lines);
    if (rateFailure !== null) return rateFailure;
    if (this.#blocks < 4) this.#noteTypical(block);
    this.#blocks++;

    const { latestPlausibleMs = Infinity, utcOffsetMinutes } = this.#options;
    const stepMs = this.#stepMs;
    const perMs = 1 / stepMs;
    const slots = this.#slots;
    const jumpLimitMs = this.#jumpLimitMs;
    const slotOf = this.#slotOf;
    let chunk: OpenChunk | null = null;
    let present: Uint8Array = new Uint8Array(0);
    let from = 0;
    let to = 0;
    let runStart = 0;
    let previous = this.#previousMs;
    let firstMs = this.#firstMs;
    let lastMs = this.#lastMs;
    let regularSlots = 0;
    let regularMs = 0;
    let readable = 0;
    let duplicates = 0;

    for (let i = 0; i < rows; i++) {
      const time = times[i];
      if (!(time >= EARLIEST_STAMP_MS && time < LATEST_STAMP_MS)) {
        slotOf[i] = -1;
        this.#noteBadTime(lines[i], time);
        continue;
      }
      let slot = Math.round((time - from) * perMs);
      if (chunk === null || time < from || slot >= slots || time >= to) {
        if (chunk !== null) this.#copyRows(block, chunk, runStart, i);
        runStart = i;
        let startMs = chunkStartMs(time, utcOffsetMinutes);
        slot = Math.round((time - startMs) * perMs);
        if (slot >= slots) {
          // Rounds up to the first slot of the next half hour.
          startMs += CHUNK_MS;
          slot = 0;
        }
        chunk = this.#chunkAt(startMs);
        present = chunk.present;
        from = startMs;
        to = startMs + CHUNK_MS;
      }
      const step = time - previous;
      if (step < -0.5 * stepMs) {
        chunk.intake.backwardSteps++;
        this.#backward++;
        this.#firstBackward ??= { line: lines[i], stepMs: step };
        this.#noteJump(chunk.intake, step);
      } else if (step - stepMs > jumpLimitMs) {
        chunk.intake.clockJumps++;
        this.#jumps++;
        this.#noteJump(chunk.intake, step);
      } else if (step === step) {
        regularSlots += Math.round(step * perMs);
        regularMs += step;
      }
      previous = time;
      if (time < firstMs) firstMs = time;
      if (time > lastMs) lastMs = time;
      if (time > latestPlausibleMs) this.#futureLine ??= lines[i];
      readable++;

      if (present[slot] === 1) {
        duplicates++;
        chunk.intake.duplicates++;
        slotOf[i] = -1;
      } else {
        present[slot] = 1;
        slotOf[i] = slot;
      }
    }
    if (chunk !== null) this.#copyRows(block, chunk, runStart, rows);
    this.#previousMs = previous;
    this.#firstMs = firstMs;
    this.#lastMs = lastMs;
    this.#regularSlots += regularSlots;
    this.#regularMs += regularMs;
    this.#rows += readable;
    this.#duplicates += duplicates;
    return null;
  }

  #columnOf(field: number): number {
    const channel = this.#channels.find((c) => c.field === field);
    if (channel !== undefined) return channel.column;
    const { layout } = this.#options;
    const numberFields = [
      ...new Set([...layout.columns.map((c) => c.index), ...timeFields(layout.time).numbers]),
    ];
    return FIRST_NUMBER_COLUMN + numberFields.indexOf(field);
  }

  /** Rows [from, to) of a block, all of one half hour, into its slots. */
  #copyRows(block: RowBlock, chunk: OpenChunk, from: number, to: number): void {
    const slotOf = this.#slotOf;
    const span = spanOfSlots(slotOf, from, to);
    if (span.placed === 0) return;
    chunk.firstSlot = Math.min(chunk.firstSlot, span.first);
    chunk.lastSlot = Math.max(chunk.lastSlot, span.last);
    chunk.placed += span.placed;
    this.#valueChannels.forEach(({ column }, c) => {
      const values = block.columns[column];
      // Nearly always scan after scan: then the rows go over as they are.
      if (span.isUnbroken) chunk.values[c].set(values.subarray(from, to), span.first);
      else copyValues(values, slotOf, from, to, chunk.values[c]);
    });
    this.#statusChannels.forEach(({ column }, c) =>
      copyCodes(block.columns[column], slotOf, from, to, chunk.status[c]),
    );
  }

  #noteJump(intake: OpenChunk['intake'], step: number): void {
    const offS = (step - this.#stepMs) / 1000;
    if (Math.abs(offS) > Math.abs(intake.largestJumpS)) intake.largestJumpS = offS;
  }

  #noteBadTime(line: number, time: number): void {
    this.#timeBadRows++;
    if (!Number.isNaN(time)) this.#unsetClockRows++;
    if (this.#timeBadExamples.length < 8)
      this.#timeBadExamples.push({
        line,
        reason: Number.isNaN(time)
          ? 'date or time cannot be read'
          : `the clock reads ${new Date(Math.max(-8e15, Math.min(8e15, time))).toISOString().slice(0, 10)}, as if it had not been set`,
      });
  }

  // ------------------------------------------------------------------------------------------------------------- clocks

  /**
   * Stamps that stand still while scans go on (whole seconds at 20 Hz, say): the scans of one stamp are spread evenly over it.
   * Looked for in the first block only.
   */
  #findCoarseStamps(rows: number): void {
    if (rows < 20) return;
    const times = this.#times;
    let still = 0;
    const steps: number[] = [];
    for (let i = 1; i < rows; i++) {
      const step = times[i] - times[i - 1];
      if (step === 0) still++;
      else if (step > 0 && steps.length < 200) steps.push(step);
    }
    if (still < 0.4 * rows || steps.length < 3) return;
    const stepMs = steps.sort((a, b) => a - b)[steps.length >> 1];
    const scansAStep = stepMs / this.#stepMs;
    // As many scans stand on one stamp as the rate says?
    if (Math.abs(still / (rows - still) + 1 - scansAStep) > 0.2 * scansAStep) return;
    let first = 0;
    while (first < rows && times[first] === times[0]) first++;
    // The file may begin in the middle of a second: its first scans are counted back from the next stamp.
    const missing = Math.max(0, Math.round(scansAStep) - first);
    this.#coarse = { stepMs, groupMs: times[0], index: missing - 1 };
  }

  #spreadCoarse(rows: number): void {
    const coarse = this.#coarse;
    if (coarse === null) return;
    const times = this.#times;
    for (let i = 0; i < rows; i++) {
      if (times[i] === coarse.groupMs) {
        coarse.index++;
      } else {
        coarse.groupMs = times[i];
        coarse.index = 0;
      }
      times[i] += coarse.index * this.#stepMs;
    }
  }

  /** Compares the spacing of stamps (median over two seconds, so that jitter does not count) with the layout's rate. */
  #checkRate(rows: number, lines: Int32Array): RecordError | null {
    const { layout } = this.#options;
    if (layout.time.kind === 'start-and-rate') return null;
    const times = this.#times;
    const span = Math.max(1, Math.min(Math.round(2 * layout.sampleRateHz), Math.floor(rows / 4)));
    const spans: number[] = [];
    const steps: number[] = [];
    let moves = 0;
    for (let i = 1, first = 0; i < rows; i++) {
      // Scans given twice do not make the rate higher.
      if (times[i] !== times[i - 1]) moves++;
      if (times[i] > times[i - 1] && steps.length < 2000) steps.push(times[i] - times[i - 1]);
      if (i - first < span) continue;
      const step = (times[i] - times[first]) / moves;
      if (step > 0) spans.push(step);
      first = i;
      moves = 0;
    }
    if (spans.length < 3) return null;
    const rateHz = 1000 / spans.sort((a, b) => a - b)[spans.length >> 1];
    if (Math.abs(rateHz / layout.sampleRateHz - 1) <= RATE_ERROR) return null;
    // Many lost rows make spans longer, but leave short steps of the right length.
    const shortStep = steps.sort((a, b) => a - b)[steps.length >> 2];
    if (Math.abs(shortStep / this.#stepMs - 1) <= RATE_ERROR) return null;
    if (this.#blocks === 0) return this.#rateError(rateHz, lines[0]);
    this.#rowsAtOtherRate += rows;
    this.#otherRate ??= { line: lines[0], rateHz };
    return null;
  }

  #rateError(rateHz: number, line: number): RecordError {
    const { sampleRateHz } = this.#options.layout;
    const found = roundedRate(rateHz);
    return new RecordError('rate-mismatch', {
      message: `stamps at ${found} Hz, layout says ${sampleRateHz} Hz`,
      userMessage: `The stamps follow one another at ${found} Hz, but the layout says ${sampleRateHz} Hz. The file was kept as it is. Correct the rate in the layout and the set-up, or choose the layout that fits this file.`,
      line,
    });
  }

  // ------------------------------------------------------------------------------------------------------------- chunks

  #chunkAt(startMs: number): OpenChunk {
    const existing = this.#open.find((chunk) => chunk.startMs === startMs);
    if (existing !== undefined) return existing;
    if (this.#open.length >= OPEN_CHUNKS)
      this.#close(this.#open.reduce((a, b) => (b.startMs < a.startMs ? b : a)));
    if (this.#closedStarts.has(startMs)) this.#parts++;
    const chunk = this.#spares().pop() ?? {
      startMs,
      present: new Uint8Array(this.#slots),
      values: this.#valueChannels.map(() => new Float32Array(this.#slots).fill(NaN)),
      status: this.#statusChannels.map(() => new Int32Array(this.#slots).fill(STATUS_MISSING)),
      intake: emptyIntake(startMs),
      firstSlot: this.#slots,
      lastSlot: -1,
      placed: 0,
    };
    chunk.startMs = startMs;
    chunk.intake = emptyIntake(startMs);
    this.#open.push(chunk);
    return chunk;
  }

  /** Hands a chunk over and takes its arrays back. */
  #close(chunk: OpenChunk): void {
    this.#open.splice(this.#open.indexOf(chunk), 1);
    this.#closedStarts.add(chunk.startMs);
    const length = chunk.placed === 0 ? 0 : chunk.lastSlot - chunk.firstSlot + 1;
    const rowsRead = chunk.placed + chunk.intake.duplicates;
    if (length > 0) {
      const to = chunk.lastSlot + 1;
      const columns: ChunkColumns = {
        firstSlot: chunk.firstSlot,
        length,
        present: chunk.present.subarray(chunk.firstSlot, to),
        values: {},
        status: {},
      };
      let signalStrengthP95: number | null = null;
      this.#valueChannels.forEach(({ channel }, c) => {
        const values = chunk.values[c].subarray(chunk.firstSlot, to);
        columns.values[channel] = values;
        if (channel === 'signalStrength') signalStrengthP95 = this.#percentile95(values);
      });
      this.#statusChannels.forEach(({ channel }, c) => {
        columns.status[channel] = chunk.status[c].subarray(chunk.firstSlot, to);
      });
      this.#lookForValues(columns);
      const intake: ChunkIntake = {
        ...chunk.intake,
        rowsRead,
        firstSlot: chunk.firstSlot,
        length,
        signalStrengthP95,
      };
      this.#intakes.push(intake);
      this.#options.onChunk(columns, intake);
    } else if (rowsRead > 0) {
      // Only scans that were there already (duplicates of another part): nothing to hand over, but they were read.
      this.#intakes.push({ ...chunk.intake, rowsRead, firstSlot: 0, length: 0, signalStrengthP95: null });
      this.#options.onChunk(
        { firstSlot: 0, length: 0, present: new Uint8Array(0), values: {}, status: {} },
        this.#intakes[this.#intakes.length - 1],
      );
    }
    chunk.present.fill(0);
    for (const values of chunk.values) values.fill(NaN);
    for (const status of chunk.status) status.fill(STATUS_MISSING);
    chunk.firstSlot = this.#slots;
    chunk.lastSlot = -1;
    chunk.placed = 0;
    const spares = this.#spares();
    if (spares.length < OPEN_CHUNKS) spares.push(chunk);
  }

  #spares(): OpenChunk[] {
    const shape = `${this.#slots} ${this.#valueChannels.length} ${this.#statusChannels.length}`;
    let spares = spareChunks.get(shape);
    if (spares === undefined) {
      // One shape at a time: files of one layout follow one another.
      spareChunks.clear();
      spareChunks.set(shape, (spares = []));
    }
    return spares;
  }

  #percentile95(values: Float32Array): number | null {
    if (this.#work.length < values.length) this.#work = new Float64Array(this.#slots);
    const work = this.#work.subarray(0, values.length);
    work.set(values);
    const found = quantile(work, 0.95);
    return found === found ? found : null;
  }

  #lookForValues(columns: ChunkColumns): void {
    for (const { channel } of this.#channels) {
      if (!this.#withoutValue.has(channel)) continue;
      const hasValue =
        columns.values[channel]?.some((value) => value === value) ??
        columns.status[channel]?.some((code) => code !== STATUS_MISSING);
      if (hasValue === true) this.#withoutValue.delete(channel);
    }
  }

  /** Median of some of the first rows per channel, for doubting units. */
  #noteTypical(block: RowBlock): void {
    const stride = Math.max(1, Math.floor(block.rows / 256));
    const work = new Float64Array(Math.ceil(block.rows / stride));
    for (const { channel, column } of this.#valueChannels) {
      if (this.#typical.has(channel)) continue;
      let n = 0;
      for (let i = 0; i < block.rows; i += stride) {
        const value = block.columns[column][i];
        if (value === value) work[n++] = value;
      }
      if (n > 0) this.#typical.set(channel, quantileInPlace(work, n, 0.5));
    }
  }

  // ------------------------------------------------------------------------------------------------------------- report

  /** Is the file as a whole usable? */
  #verdict(): RecordError | null {
    const parser = this.#parser;
    if (parser === null) return null;
    const bad = parser.badRows + this.#timeBadRows;
    const seen = parser.rowsSeen - (parser.truncatedLastRow ? 1 : 0);
    if (seen === 0)
      return new RecordError('no-data-rows', {
        message: 'no complete row',
        userMessage:
          'The file holds no complete row of data. It was kept as it is; nothing can be computed from it. Check whether the logger wrote it to the end.',
      });
    const example = this.#badRowExamples()[0];
    const where = example === undefined ? '' : ` First in line ${example.line}: ${example.reason}.`;
    const badTimes = this.#timeBadRows + this.#examplesOf(parser, 'date or time cannot be read');
    if (bad > seen / 2 && this.#unsetClockRows > seen / 2)
      return new RecordError('no-time', {
        message: `${this.#unsetClockRows} of ${seen} stamps out of the calendar`,
        userMessage: `The stamps are not of this time: the logger's clock seems not to have been set.${where} The file was kept as it is. If you know when it was recorded, use a layout that takes the start from the file's name.`,
        line: example?.line ?? null,
      });
    if (bad > seen / 2 && badTimes > 0 && badTimes >= Math.min(bad, 8))
      return new RecordError('no-time', {
        message: `${bad} of ${seen} rows without a readable time`,
        userMessage: `Date or time cannot be read in ${percent(bad, seen)} of the rows.${where} The file was kept as it is. Correct the time columns or their format in the layout.`,
        line: example?.line ?? null,
      });
    if (bad > seen / 2)
      return new RecordError('bad-rows', {
        message: `${bad} of ${seen} rows unreadable`,
        userMessage: `${percent(bad, seen)} of the rows cannot be read with this layout.${where} The file was kept as it is. Check the delimiter and the number of header lines in the layout.`,
        line: example?.line ?? null,
      });
    if (this.#otherRate !== null && this.#rowsAtOtherRate > this.#rows / 2)
      return this.#rateError(this.#otherRate.rateHz, this.#otherRate.line);
    const fitted = this.#fittedRateHz();
    const { sampleRateHz } = this.#options.layout;
    if (this.#otherRate === null && fitted !== null && Math.abs(fitted / sampleRateHz - 1) > RATE_ERROR)
      return this.#rateError(fitted, this.#opening?.headerLines.length ?? 0);
    return null;
  }

  #examplesOf(parser: BlockParser, reason: string): number {
    return parser.badRowExamples.filter((row) => row.reason === reason).length;
  }

  #badRowExamples(): BadRow[] {
    return [...(this.#parser?.badRowExamples ?? []), ...this.#timeBadExamples]
      .sort((a, b) => a.line - b.line)
      .slice(0, 8);
  }

  #fittedRateHz(): number | null {
    if (this.#options.layout.time.kind === 'start-and-rate' || this.#rows < 2 || this.#regularMs <= 0)
      return null;
    return (1000 * this.#regularSlots) / this.#regularMs;
  }

  #report(contentHash: string, beginsWith: string[]): IngestReport {
    const { layout } = this.#options;
    const parser = this.#parser;
    const units: IngestReport['units'] = {};
    for (const column of layout.columns) units[column.channel] = column.unit;
    return {
      schema: 'gustbook/ingest/1',
      contentHash,
      contentBytes: this.#bytes,
      beginsWith,
      layoutHash: hashOf(layout),
      sampleRateHz: layout.sampleRateHz,
      fittedRateHz: this.#fittedRateHz(),
      rows: this.#rows,
      badRows: (parser?.badRows ?? 0) + this.#timeBadRows,
      badRowExamples: this.#badRowExamples(),
      firstScanMs: this.#firstMs,
      lastScanMs: this.#lastMs,
      channels: this.#channels.map((c) => c.channel),
      units,
      chunks: this.#intakes,
      warnings: this.#warnings(),
      truncatedLastRow: parser?.truncatedLastRow ?? false,
    };
  }

  #warnings(): IngestReport['warnings'] {
    const warnings: IngestReport['warnings'] = [];
    const add = (code: string, message: string): void => {
      warnings.push({ code, message });
    };
    const { layout } = this.#options;
    const parser = this.#parser;
    if (parser === null) return warnings;
    const bad = parser.badRows + this.#timeBadRows;
    if (bad > 0) {
      const example = this.#badRowExamples()[0];
      add(
        'bad-rows',
        `${count(bad, 'row')} could not be read${example ? `; first line ${example.line}: ${example.reason}` : ''}.`,
      );
    }
    if (parser.truncatedLastRow) add('truncated-last-row', 'The last row was cut off and is left out.');
    if (parser.skippedNulBytes > 0)
      add(
        'nul-bytes',
        `${parser.skippedNulBytes} NUL bytes were skipped: the logger reserved space it did not write.`,
      );
    for (const [field, { count: n, line, text }] of [...parser.unreadable].sort((a, b) => a[0] - b[0]))
      add(
        'unreadable-values',
        `Column ${field + 1} (${this.#nameOf(field)}): ${count(n, 'value')} that ${n === 1 ? 'is' : 'are'} no number, first "${text}" in line ${line}; taken as missing.`,
      );
    const empty = this.#channels.filter((c) => this.#withoutValue.has(c.channel));
    if (empty.length > 0)
      add('all-missing', `Without a single value: ${empty.map((c) => this.#nameOf(c.field)).join(', ')}.`);
    if (this.#backward > 0 && this.#firstBackward !== null)
      add(
        'time-reversed',
        `The clock went back ${count(this.#backward, 'time')}, first in line ${this.#firstBackward.line} by ${seconds(-this.#firstBackward.stepMs)}. Where an instant comes twice, the scan that was written first is used.`,
      );
    if (this.#duplicates > 0)
      add(
        'duplicates',
        `${count(this.#duplicates, 'scan')} came at an instant already taken; the first stays.`,
      );
    if (this.#jumps > 0)
      add(
        'clock-jumps',
        `${count(this.#jumps, 'gap or jump')} of the clock of more than ${seconds(this.#jumpLimitMs)}.`,
      );
    if (this.#parts > 0)
      add(
        'split-chunks',
        `${count(this.#parts, 'half hour')} had to be taken up again after the clock went far back.`,
      );
    const fitted = this.#fittedRateHz();
    if (this.#otherRate !== null)
      add(
        'rate-change',
        `From line ${this.#otherRate.line} on stamps come at ${roundedRate(this.#otherRate.rateHz)} Hz instead of ${layout.sampleRateHz} Hz, for ${count(this.#rowsAtOtherRate, 'row')}.`,
      );
    else if (fitted !== null && Math.abs(fitted / layout.sampleRateHz - 1) > RATE_WARNING)
      add(
        'rate-drift',
        `Stamps come at ${fitted.toFixed(4)} Hz; the layout says ${layout.sampleRateHz} Hz. The clock drifts, or the rate is another.`,
      );
    if (this.#coarse !== null)
      add(
        'coarse-stamps',
        `Stamps change only every ${seconds(this.#coarse.stepMs)}; the scans in between were spread evenly.`,
      );
    const zone = this.#reader?.contradictingZoneMinutes() ?? null;
    if (zone !== null)
      add(
        'zone-in-stamp',
        `The stamps state an offset of ${zone} min from UTC, the layout another; the stamps were followed.`,
      );
    if (this.#futureLine !== null)
      add(
        'future-stamps',
        `From line ${this.#futureLine} on the stamps lie in the future: check the logger's clock.`,
      );
    this.#headerWarnings(add);
    for (const column of layout.columns) {
      const range = typicalRanges[column.channel]?.[column.unit];
      const typical = this.#typical.get(column.channel);
      if (range !== undefined && typical !== undefined && (typical < range[0] || typical > range[1]))
        add(
          'unit-doubtful',
          `${column.name ?? column.channel}: a typical value of ${Number(typical.toPrecision(4))} is hardly ${column.unit}; check unit and column.`,
        );
    }
    return warnings;
  }

  /** Names and units of the header against the layout. */
  #headerWarnings(add: (code: string, message: string) => void): void {
    const { layout } = this.#options;
    const header = this.#opening?.headerLines ?? [];
    const rowOf = (index: number | null): string[] | null =>
      index === null || header[index] === undefined
        ? null
        : fieldsOf(header[index].replace(/^\uFEFF/, ''), layout.delimiter);
    const names = rowOf(layout.nameRow);
    const units = rowOf(layout.unitRow);
    for (const column of layout.columns) {
      const name = names?.[column.index];
      if (name !== undefined && column.name !== null && name !== column.name)
        add(
          'name-differs',
          `Column ${column.index + 1} is called "${name.slice(0, 40)}" in this file, "${column.name}" in the layout.`,
        );
      const written = units?.[column.index];
      const reading = written === undefined ? null : readUnit(written);
      const unit = reading === null ? null : unitForChannel(column.channel, reading);
      if (unit !== null && unit !== column.unit && unit !== column.unit.replace(/ dry$/, ''))
        add(
          'unit-differs',
          `Column ${column.index + 1} (${column.name ?? column.channel}) is in ${unit} by its header, in ${column.unit} by the layout.`,
        );
    }
  }

  #nameOf(field: number): string {
    const column = this.#options.layout.columns.find((c) => c.index === field);
    return column?.name ?? column?.channel ?? 'time';
  }
}

/** Slots of some rows: how many have one, the first and last of them, and whether every row has the slot behind the row before. */
function spanOfSlots(
  slotOf: Int32Array,
  from: number,
  to: number,
): { placed: number; first: number; last: number; isUnbroken: boolean } {
  let placed = 0;
  let first = Infinity;
  let last = -1;
  let isUnbroken = from < to && slotOf[from] >= 0;
  const begin = slotOf[from] - from;
  for (let i = from; i < to; i++) {
    const slot = slotOf[i];
    if (slot - i !== begin) isUnbroken = false;
    if (slot < 0) continue;
    placed++;
    if (slot < first) first = slot;
    if (slot > last) last = slot;
  }
  return { placed, first, last, isUnbroken };
}

function copyValues(
  source: Float64Array,
  slotOf: Int32Array,
  from: number,
  to: number,
  target: Float32Array,
): void {
  for (let i = from; i < to; i++) {
    const slot = slotOf[i];
    if (slot >= 0) target[slot] = source[i];
  }
}

function copyCodes(
  source: Float64Array,
  slotOf: Int32Array,
  from: number,
  to: number,
  target: Int32Array,
): void {
  for (let i = from; i < to; i++) {
    const slot = slotOf[i];
    const code = source[i];
    // Codes of 32 bits without sign keep their bits.
    if (slot >= 0) target[slot] = code === code ? code | 0 : STATUS_MISSING;
  }
}

function emptyIntake(startMs: number): OpenChunk['intake'] {
  return { startMs, duplicates: 0, clockJumps: 0, backwardSteps: 0, largestJumpS: 0 };
}

function roundedRate(rateHz: number): number {
  return Number(rateHz.toPrecision(4));
}

function count(n: number, what: string): string {
  if (n === 1) return `1 ${what}`;
  const plural = what === 'gap or jump' ? 'gaps or jumps' : what === 'half hour' ? 'half hours' : `${what}s`;
  return `${n} ${plural}`;
}

function seconds(ms: number): string {
  return `${Number((ms / 1000).toPrecision(4))} s`;
}

function percent(part: number, whole: number): string {
  return `${Math.round((100 * part) / whole)} %`;
}
