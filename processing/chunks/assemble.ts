import { celsiusZeroK, molarMassCo2, molarMassWater } from '../constants';
import { defaultValue } from '../defaults';
import { seriesKernel } from '../numerics/series-kernel';
import { statusChannels, type ChannelKey, type Layout } from '../schemas/layout';
import { gasKeys, type Block, type GasKey, type MarginSamples } from '../state';
import {
  CHUNK_MINUTES,
  STATUS_MISSING,
  type ChunkColumns,
  type ChunkIntake,
  type IngestReport,
} from './chunk';
import { filesThatCount } from './precedence';

const CHUNK_MS = CHUNK_MINUTES * 60_000;

/** One raw file's part in a block: its report, the layout it was read with, and the chunks that bear on the block. */
export interface BlockSource {
  report: IngestReport;
  layout: Pick<Layout, 'columns'>;
  chunks: { intake: ChunkIntake; columns: ChunkColumns }[];
}

export interface BlockRequest {
  /** ms UTC, half-open. */
  startMs: number;
  endMs: number;
  sampleRateHz: number;
  /** In any order; precedence is by content. */
  sources: BlockSource[];
  /** Samples wanted before and behind the period [s]. */
  marginS: number;
  /** Where the block's arrays come from; without it they are made anew. */
  arrays?: BlockArrays;
}

/**
 * Arrays for one block after another: those of the block before are used again, so only one block can be in use at a time. Fresh arrays
 * for every period would be collected too late to keep memory flat.
 */
export class BlockArrays {
  readonly #float64: Float64Array[] = [];
  readonly #int32: Int32Array[] = [];
  readonly #bytes: Uint8Array[] = [];
  #used = { float64: 0, int32: 0, bytes: 0 };

  /** From here on the arrays of the last block are free. */
  reset(): void {
    this.#used = { float64: 0, int32: 0, bytes: 0 };
  }

  /** What stands in it is left over from the block before. */
  float64(length: number): Float64Array {
    const n = this.#used.float64++;
    if ((this.#float64[n]?.length ?? -1) !== length) this.#float64[n] = new Float64Array(length);
    return this.#float64[n];
  }

  int32(length: number): Int32Array {
    const n = this.#used.int32++;
    if ((this.#int32[n]?.length ?? -1) !== length) this.#int32[n] = new Int32Array(length);
    return this.#int32[n].fill(STATUS_MISSING);
  }

  bytes(length: number): Uint8Array {
    const n = this.#used.bytes++;
    if ((this.#bytes[n]?.length ?? -1) !== length) this.#bytes[n] = new Uint8Array(length);
    return this.#bytes[n].fill(0);
  }
}

type GasMeasure = NonNullable<Block['gasMeasures'][GasKey]>;

/** inner = factor × written + offset; `speedOfSound`: the square of what is written, Ts = c² / (γ R_d). */
interface Conversion {
  factor: number;
  offset: number;
  speedOfSound?: true;
}

const same: Conversion = { factor: 1, offset: 0 };
const speeds: Record<string, Conversion> = {
  'm s-1': same,
  'cm s-1': { factor: 0.01, offset: 0 },
  'km h-1': { factor: 1 / 3.6, offset: 0 },
};

/** Units of the layout → units of a block. */
const conversions: Record<ChannelKey, Record<string, Conversion>> = {
  windU: speeds,
  windV: speeds,
  windW: speeds,
  sonicTemperature: {
    K: same,
    degC: { factor: 1, offset: celsiusZeroK },
    'm s-1': { factor: 1 / defaultValue('sonic.crosswindDivisor'), offset: 0, speedOfSound: true },
  },
  co2: {
    'mmol m-3': same,
    'mg m-3': { factor: 1 / (molarMassCo2 * 1000), offset: 0 },
    'umol m-3': { factor: 0.001, offset: 0 },
    'umol mol-1': same,
    'umol mol-1 dry': same,
  },
  h2o: {
    'mmol m-3': same,
    'g m-3': { factor: 1 / molarMassWater, offset: 0 },
    'mol m-3': { factor: 1000, offset: 0 },
    'mmol mol-1': same,
    'mmol mol-1 dry': same,
  },
  airTemperature: { K: same, degC: { factor: 1, offset: celsiusZeroK } },
  airPressure: { Pa: same, hPa: { factor: 100, offset: 0 }, kPa: { factor: 1000, offset: 0 } },
  sonicStatus: { code: same },
  analyserStatus: { code: same },
  signalStrength: { '%': same, '1': { factor: 100, offset: 0 } },
};

function gasMeasureOf(unit: string): GasMeasure {
  if (unit.endsWith(' dry')) return 'dry-mole-fraction';
  return unit.endsWith('mol-1') ? 'mole-fraction' : 'molar-density';
}

interface Merged {
  length: number;
  values: Partial<Record<ChannelKey, Float64Array>>;
  status: Partial<Record<ChannelKey, Int32Array>>;
  present: Uint8Array;
  recorded: number;
}

/**
 * The samples of one averaging period from the chunks of all raw files that hold some of it, in inner units, with margins.
 *
 * Where several files hold the same instant, each channel comes from the first in order of precedence that recorded it. A gas that two
 * files measured in different ways (density, mole fraction) is taken from those that agree with the first.
 *
 * @returns a block whose arrays belong to the caller; all missing where nothing was recorded
 */
export function assembleBlock(request: BlockRequest): Block {
  const { startMs, endMs, sampleRateHz, marginS, arrays = new BlockArrays() } = request;
  arrays.reset();
  const sources = filesThatCount(
    request.sources.filter((source) => source.report.sampleRateHz === sampleRateHz),
    (source) => source.report,
  );
  const length = Math.round((sampleRateHz * (endMs - startMs)) / 1000);
  const gasMeasures: Block['gasMeasures'] = {};
  for (const gas of gasKeys)
    for (const { layout } of sources) {
      const column = layout.columns.find((c) => c.channel === gas);
      if (column !== undefined) gasMeasures[gas] ??= gasMeasureOf(column.unit);
    }

  const used = new Set<string>();
  const main = merge(sources, startMs, length, sampleRateHz, gasMeasures, true, used, arrays);
  const marginLength = Math.round(marginS * sampleRateHz);
  const marginMs = (marginLength / sampleRateHz) * 1000;
  const margin = (fromMs: number): MarginSamples | null => {
    if (marginLength === 0) return null;
    const merged = merge(sources, fromMs, marginLength, sampleRateHz, gasMeasures, false, null, arrays);
    return merged.recorded === 0 ? null : { length: marginLength, values: merged.values };
  };
  return {
    startMs,
    endMs,
    sampleRateHz,
    length,
    values: main.values,
    status: main.status,
    present: main.present,
    gasMeasures,
    intake: { ...sumIntake(sources, startMs, endMs), rawFiles: [...used] },
    margins: { before: margin(startMs - marginMs), after: margin(endMs) },
  };
}

function merge(
  sources: readonly BlockSource[],
  fromMs: number,
  length: number,
  sampleRateHz: number,
  gasMeasures: Block['gasMeasures'],
  withStatus: boolean,
  used: Set<string> | null,
  arrays: BlockArrays,
): Merged {
  const merged: Merged = { length, values: {}, status: {}, present: arrays.bytes(length), recorded: 0 };
  const toMs = fromMs + (length / sampleRateHz) * 1000;
  const pieces: { source: BlockSource; columns: ChunkColumns; shift: number }[] = [];
  for (const source of sources)
    for (const { intake, columns } of source.chunks)
      if (intake.startMs < toMs && intake.startMs + CHUNK_MS > fromMs && columns.length > 0)
        // Slot of the first sample of the chunk's columns, counted from the first sample wanted.
        pieces.push({
          source,
          columns,
          shift: Math.round(((intake.startMs - fromMs) * sampleRateHz) / 1000) + columns.firstSlot,
        });
  pieces.sort((a, b) => sources.indexOf(a.source) - sources.indexOf(b.source));

  for (const { source, columns, shift } of pieces) {
    const from = Math.max(0, -shift);
    const to = Math.min(columns.length, length - shift);
    const { added, fresh } = markPresent(columns.present, from, to, shift, merged.present);
    merged.recorded += fresh;
    if (added > 0) used?.add(source.report.contentHash);
  }

  const ends = pieces.map(({ columns, shift }) => ({ first: shift, behind: shift + columns.length }));
  const mayOverlap = ends.some((a, i) =>
    ends.some((b, k) => k > i && a.first < b.behind && b.first < a.behind),
  );

  for (const channel of new Set(sources.flatMap((source) => source.layout.columns.map((c) => c.channel)))) {
    const isStatus = statusChannels.includes(channel);
    if (isStatus && !withStatus) continue;
    const values = isStatus ? null : arrays.float64(length);
    // One piece that holds every slot leaves nothing to be marked as missing, where it has the channel.
    const isWhole = pieces.length === 1 && merged.recorded === length;
    let isFilled = false;
    if (!isWhole) values?.fill(NaN);
    const status = isStatus ? arrays.int32(length) : null;
    // Slots that a file of higher precedence recorded with this channel, value or not; needed only where files may overlap.
    const covered = mayOverlap ? arrays.bytes(length) : null;
    for (const { source, columns, shift } of pieces) {
      const column = source.layout.columns.find((c) => c.channel === channel);
      if (column === undefined) continue;
      if ((channel === 'co2' || channel === 'h2o') && gasMeasureOf(column.unit) !== gasMeasures[channel])
        continue;
      const from = Math.max(0, -shift);
      const to = Math.min(columns.length, length - shift);
      const { present } = columns;
      const codes = columns.status[channel];
      if (status !== null && codes !== undefined)
        copyCodes({ from, to, shift, present, covered }, codes, status);
      const written = columns.values[channel];
      if (values !== null && written !== undefined) {
        copyValues({ from, to, shift, present, covered }, written, conversions[channel][column.unit], values);
        isFilled = true;
      }
    }
    if (isWhole && !isFilled) values?.fill(NaN);
    if (values !== null) merged.values[channel] = values;
    if (status !== null) merged.status[channel] = status;
  }
  return merged;
}

// Loops over samples stand in functions of their own: the compiler keeps those, and gives up again and again on longer ones around them.

/** Marks the slots of a block that a chunk recorded; `fresh`: those that no chunk before had. */
function markPresent(
  present: Uint8Array,
  from: number,
  to: number,
  shift: number,
  into: Uint8Array,
): { added: number; fresh: number } {
  if (to <= from) return { added: 0, fresh: 0 };
  const isWhole = !present.subarray(from, to).includes(0);
  if (isWhole && !into.subarray(from + shift, to + shift).includes(1)) {
    into.fill(1, from + shift, to + shift);
    return { added: to - from, fresh: to - from };
  }
  let added = 0;
  let fresh = 0;
  for (let i = from; i < to; i++) {
    if (present[i] !== 1) continue;
    added++;
    if (into[shift + i] === 1) continue;
    into[shift + i] = 1;
    fresh++;
  }
  return { added, fresh };
}

/** Part of a chunk that goes into a block. */
interface Part {
  /** Slots of the chunk's columns. */
  from: number;
  to: number;
  /** Slot in the block of the chunk's first. */
  shift: number;
  present: Uint8Array;
  covered: Uint8Array | null;
}

/** Which samples of a part count, for parts that may lie over others; marks them as covered. */
function uncovered({ from, to, shift, present, covered }: Part): Uint8Array {
  if (covered === null) return present;
  const counts = new Uint8Array(present.length);
  for (let i = from; i < to; i++) {
    if (present[i] === 0 || covered[shift + i] === 1) continue;
    counts[i] = 1;
    covered[shift + i] = 1;
  }
  return counts;
}

function copyCodes(part: Part, codes: Int32Array, into: Int32Array): void {
  const { from, to, shift } = part;
  if (to <= from) return;
  const counts = uncovered(part);
  if (!counts.subarray(from, to).includes(0)) {
    into.set(codes.subarray(from, to), from + shift);
    return;
  }
  for (let i = from; i < to; i++) if (counts[i] !== 0) into[shift + i] = codes[i];
}

function copyValues(part: Part, written: Float32Array, conversion: Conversion, into: Float64Array): void {
  const { from, to, shift } = part;
  const { factor, offset, speedOfSound = false } = conversion;
  if (to <= from) return;
  const counts = uncovered(part).subarray(from, to);
  const kernel = seriesKernel(to - from);
  const [work] = kernel.work;
  const pointer = kernel.pointerOfSingles(written.subarray(from, to));
  // An infinity (a number too large for a chunk) is no measurement.
  kernel.run.convertSingles(pointer, to - from, factor, offset, speedOfSound ? 1 : 0, work);
  const converted = kernel.valuesAt(work, to - from);
  if (counts.includes(0)) takeCounting(counts, converted, into, from + shift);
  else into.set(converted, from + shift);
}

function takeCounting(counts: Uint8Array, values: Float64Array, into: Float64Array, at: number): void {
  for (let i = 0; i < counts.length; i++) if (counts[i] !== 0) into[at + i] = values[i];
}

/** Clock findings of the half hours that the period touches. */
function sumIntake(
  sources: readonly BlockSource[],
  startMs: number,
  endMs: number,
): Omit<Block['intake'], 'rawFiles'> {
  const sum = {
    rowsRead: 0,
    duplicates: 0,
    clockJumps: 0,
    backwardSteps: 0,
    largestJumpS: 0,
    fittedRateHz: null as number | null,
  };
  for (const { report, chunks } of sources)
    for (const { intake } of chunks) {
      if (intake.startMs >= endMs || intake.startMs + CHUNK_MS <= startMs) continue;
      sum.rowsRead += intake.rowsRead;
      sum.duplicates += intake.duplicates;
      sum.clockJumps += intake.clockJumps;
      sum.backwardSteps += intake.backwardSteps;
      if (Math.abs(intake.largestJumpS) > Math.abs(sum.largestJumpS)) sum.largestJumpS = intake.largestJumpS;
      sum.fittedRateHz ??= report.fittedRateHz;
    }
  return sum;
}
