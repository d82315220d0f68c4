import { kernelBase64 } from './kernel.generated';

/** Why `parseRows` returned. */
export const kernelStop = { usedUp: 0, blockFull: 1, listsFull: 2, incomplete: 3, tooManyFields: 4 } as const;

/** What a field of a row is for, in the plan: −1 skipped, 0… column number, or one of the two time texts. */
export const fieldAction = { skip: -1, dateText: 128, timeText: 129 } as const;

/** Column 0 holds the value of the date text, column 1 that of the time text; numbers follow. */
export const DATE_COLUMN = 0;
export const TIME_COLUMN = 1;
export const FIRST_NUMBER_COLUMN = 2;

/** Bytes of text the kernel is given at a time: small enough to stay in a core's cache between copy and parse. */
export const SLICE_BYTES = 256 * 1024;
/** Longest line that can be read. */
export const MAX_LINE_BYTES = 1024 * 1024;
/** Most columns a row may have. */
export const MAX_FIELDS = 4096;
const TEXT_PADDING = 64;
/** At least twice what one window of the kernel can add. */
const ODD_CAPACITY = 32 * 1024;
const WINDOW_BYTES = 24 * 1024;
const BAD_CAPACITY = 32;

interface KernelExports {
  setDialect(delimiter: number, isBlanks: number, newline: number, decimal: number, isQuoted: number): void;
  setPlan(pointer: number, length: number, fields: number): void;
  setMemory(
    shuffle: number,
    powers: number,
    columns: number,
    rows: number,
    lines: number,
    ordinals: number,
    odd: number,
    oddRoom: number,
    bad: number,
    badRoom: number,
    cache: number,
    index: number,
    rowEnds: number,
    constants: number,
  ): void;
  start(firstLine: number): void;
  nextBlock(): void;
  clearLists(): void;
  rowCount(): number;
  lineCount(): number;
  ordinalCount(): number;
  consumedTo(): number;
  oddTokens(): number;
  badRows(): number;
  badRowsListed(): number;
  rememberPrefix(length: number, base: number, mark: number): void;
  blankOut(column: number, first: number, sentinel: number): void;
  parseRows(from: number, end: number, isLast: number): number;
}

export interface Kernel {
  exports: KernelExports;
  /** Room for text: MAX_LINE_BYTES of carried text plus one slice, then padding. */
  text: Uint8Array;
  textPointer: number;
  columns: Float64Array[];
  lines: Int32Array;
  ordinals: Int32Array;
  /** Quadruples row, column, pointer, length. */
  odd: Int32Array;
  /** Quadruples line, code, fields, ordinal. */
  bad: Int32Array;
  memory: Uint8Array;
  resolveTime: ResolveTime;
  setPlan: (plan: Int32Array, fieldCount: number) => void;
}

/** Asked for a time or date text that the kernel has not seen just before; milliseconds or NaN. */
export type ResolveTime = (which: 'date' | 'time', text: string, kernel: KernelExports) => number;

let compiled: WebAssembly.Module | null = null;

function compileKernel(): WebAssembly.Module {
  if (compiled === null) {
    const binary = atob(kernelBase64);
    const bytes = new Uint8Array(binary.length);
    for (let i = 0; i < binary.length; i++) bytes[i] = binary.charCodeAt(i);
    compiled = new WebAssembly.Module(bytes);
  }
  return compiled;
}

/** One character per byte; enough for stamps and numbers, and cheap. */
export function latin1(bytes: Uint8Array, from: number, to: number): string {
  let text = '';
  for (let i = from; i < to; i++) text += String.fromCharCode(bytes[i]);
  return text;
}

/** Kernels that nobody uses just now. Each has memory of its own, which costs more to make than a small file takes to read. */
const idle: Kernel[] = [];
const MOST_IDLE = 2;

/**
 * A kernel with memory for one block, for one file. Memory is laid out once and never grows, so views stay valid.
 *
 * @param plan action per field, see `fieldAction`; at most MAX_FIELDS
 * @param fieldCount number of fields a good row has
 * @param columnCount columns in all, including the two time columns
 * @param rowsPerBlock rows a block holds
 */
export function takeKernel(
  plan: Int32Array,
  fieldCount: number,
  columnCount: number,
  rowsPerBlock: number,
  resolveTime: ResolveTime,
): Kernel {
  const at = idle.findIndex((k) => k.columns.length === columnCount && k.lines.length === rowsPerBlock);
  const kernel = at === -1 ? createKernel(columnCount, rowsPerBlock) : idle.splice(at, 1)[0];
  kernel.resolveTime = resolveTime;
  kernel.setPlan(plan, fieldCount);
  return kernel;
}

/** Gives a kernel back; its views must not be used any more. */
export function returnKernel(kernel: Kernel): void {
  kernel.resolveTime = unbound;
  if (idle.length < MOST_IDLE) idle.push(kernel);
}

const unbound: ResolveTime = () => NaN;

function createKernel(columnCount: number, rowsPerBlock: number): Kernel {
  let size = 4096;
  const reserve = (bytes: number): number => {
    const pointer = size;
    size = (size + bytes + 63) & ~63;
    return pointer;
  };
  const shuffle = reserve(17 * 17 * 16);
  const powers = reserve(48 * 8);
  const constants = reserve(5 * 16 + 17 * 16 + 128 * 8);
  const index = reserve((WINDOW_BYTES + 64) * 4);
  const rowEnds = reserve((WINDOW_BYTES + 64) * 4);
  const cache = reserve(64);
  const planPointer = reserve(MAX_FIELDS * 4);
  const odd = reserve(ODD_CAPACITY * 16);
  const bad = reserve(BAD_CAPACITY * 16);
  const lines = reserve(rowsPerBlock * 4);
  const ordinals = reserve(rowsPerBlock * 4);
  const columns = reserve(columnCount * rowsPerBlock * 8);
  reserve(64);
  const textBytes = MAX_LINE_BYTES + SLICE_BYTES;
  const textPointer = reserve(textBytes + TEXT_PADDING);

  const memory = new WebAssembly.Memory({ initial: Math.ceil(size / 65536) });
  const bytes = new Uint8Array(memory.buffer);
  const instance = new WebAssembly.Instance(compileKernel(), {
    env: { memory },
    host: {
      resolveTime: (which: number, pointer: number, length: number): number =>
        kernel.resolveTime(which === 0 ? 'date' : 'time', latin1(bytes, pointer, pointer + length), exports),
    },
  });
  const exports = instance.exports as unknown as KernelExports;
  exports.setMemory(
    ...([
      shuffle,
      powers,
      columns,
      rowsPerBlock,
      lines,
      ordinals,
      odd,
      ODD_CAPACITY,
      bad,
      BAD_CAPACITY,
    ] as const),
    ...([cache, index, rowEnds, constants] as const),
  );
  const kernel: Kernel = {
    exports,
    text: new Uint8Array(memory.buffer, textPointer, textBytes + TEXT_PADDING),
    textPointer,
    columns: Array.from(
      { length: columnCount },
      (_, column) => new Float64Array(memory.buffer, columns + column * rowsPerBlock * 8, rowsPerBlock),
    ),
    lines: new Int32Array(memory.buffer, lines, rowsPerBlock),
    ordinals: new Int32Array(memory.buffer, ordinals, rowsPerBlock),
    odd: new Int32Array(memory.buffer, odd, ODD_CAPACITY * 4),
    bad: new Int32Array(memory.buffer, bad, BAD_CAPACITY * 4),
    memory: bytes,
    resolveTime: unbound,
    setPlan: (plan, fieldCount) => {
      new Int32Array(memory.buffer, planPointer, plan.length).set(plan);
      exports.setPlan(planPointer, plan.length, fieldCount);
    },
  };
  return kernel;
}
