import {
  takeKernel,
  returnKernel,
  FIRST_NUMBER_COLUMN,
  fieldAction,
  kernelStop,
  latin1,
  MAX_LINE_BYTES,
  SLICE_BYTES,
  type Kernel,
  type ResolveTime,
} from './kernel';
import { tooLongLine, tooManyColumns } from './opening';
import type { RecordError } from './record-error';
import { delimiterBytes, numericSentinels, readCode, readNumber, type DelimiterName } from './token';

/** Rows of a block by default: its columns stay in a core's second cache. */
export const ROWS_PER_BLOCK = 8192;

export interface BlockParserOptions {
  delimiter: DelimiterName;
  decimal: '.' | ',';
  quoted: boolean;
  newline: 10 | 13;
  /** Fields of a good row. */
  fieldCount: number;
  /** Fields read as numbers; the n-th becomes column FIRST_NUMBER_COLUMN + n. */
  numberFields: readonly number[];
  /** Of these, the fields that are measurements: missing tokens apply to them. */
  measuredFields: ReadonlySet<number>;
  /** Of these, the fields that hold codes, which may be hexadecimal. */
  codeFields: ReadonlySet<number>;
  dateField: number | null;
  timeField: number | null;
  missingTokens: readonly string[];
  /** Lines of the file before the first row. */
  headerLines: number;
  rowsPerBlock?: number;
  resolveTime: ResolveTime;
  /** Called with each full block and with the rest; the columns are reused afterwards. Anything it returns stops the reading. */
  onBlock: (block: RowBlock) => RecordError | null;
}

export interface RowBlock {
  rows: number;
  /** 0 date text [ms], 1 time text [ms], then the number fields. NaN where missing. */
  columns: readonly Float64Array[];
  /** One-based line of the file, by row. */
  lines: Int32Array;
  /** How many-th row of the file, counting unreadable ones, by row. */
  ordinals: Int32Array;
}

export interface BadRow {
  line: number;
  reason: string;
}

/** Bytes of delimited rows in, blocks of typed columns out. One pass, flat memory. */
export class BlockParser {
  badRows = 0;
  /** The first few of them. */
  readonly badRowExamples: BadRow[] = [];
  /** Tokens that are neither a number nor "no value", by field, with the first few examples. */
  readonly unreadable = new Map<number, { count: number; line: number; text: string }>();
  truncatedLastRow = false;
  /** Runs of NUL bytes that were skipped [bytes]. */
  skippedNulBytes = 0;

  readonly #options: BlockParserOptions;
  readonly #kernel: Kernel;
  readonly #sentinels: number[];
  readonly #missing: ReadonlySet<string>;
  readonly #fieldOfColumn: number[];
  #filled = 0;
  #settledRows = 0;
  #rowsSeen: number | null = null;
  #failure: RecordError | null = null;

  constructor(options: BlockParserOptions) {
    this.#options = options;
    const plan = new Int32Array(
      Math.max(...options.numberFields, options.dateField ?? 0, options.timeField ?? 0, 0) + 1,
    ).fill(fieldAction.skip);
    options.numberFields.forEach((field, n) => (plan[field] = FIRST_NUMBER_COLUMN + n));
    if (options.dateField !== null) plan[options.dateField] = fieldAction.dateText;
    if (options.timeField !== null) plan[options.timeField] = fieldAction.timeText;
    this.#kernel = takeKernel(
      plan,
      options.fieldCount,
      FIRST_NUMBER_COLUMN + options.numberFields.length,
      options.rowsPerBlock ?? ROWS_PER_BLOCK,
      options.resolveTime,
    );
    this.#fieldOfColumn = [-1, -1, ...options.numberFields];
    this.#sentinels = numericSentinels(options.missingTokens, options.decimal);
    this.#missing = new Set(options.missingTokens.map((token) => token.trim()));
    this.#kernel.exports.setDialect(
      delimiterBytes[options.delimiter],
      options.delimiter === 'blanks' ? 1 : 0,
      options.newline,
      options.decimal.charCodeAt(0),
      options.quoted ? 1 : 0,
    );
    this.#kernel.exports.start(options.headerLines);
  }

  /** Rows in the file so far, readable or not. */
  get rowsSeen(): number {
    return this.#rowsSeen ?? this.#kernel.exports.ordinalCount();
  }

  push(bytes: Uint8Array): RecordError | null {
    let from = 0;
    while (from < bytes.length && this.#failure === null) {
      const to = Math.min(bytes.length, from + SLICE_BYTES);
      const { text } = this.#kernel;
      text.set(bytes.subarray(from, to), this.#filled);
      const newlineAt = text
        .subarray(this.#filled, this.#filled + (to - from))
        .lastIndexOf(this.#options.newline);
      const end = newlineAt === -1 ? 0 : this.#filled + newlineAt + 1;
      this.#filled += to - from;
      from = to;
      if (end > 0) this.#parse(end, false);
      if (this.#filled > MAX_LINE_BYTES && !this.#dropNuls())
        this.#failure ??= tooLongLine(this.#kernel.exports.lineCount() + 1);
    }
    return this.#failure;
  }

  /** Once, at the end of the bytes. */
  finish(): RecordError | null {
    if (this.#failure === null) this.#readRest();
    this.#rowsSeen = this.rowsSeen;
    returnKernel(this.#kernel);
    return this.#failure;
  }

  #readRest(): void {
    if (this.#filled > 0) {
      const { text, exports } = this.#kernel;
      const isOpen = text[this.#filled - 1] !== this.#options.newline;
      if (isOpen) text[this.#filled++] = this.#options.newline;
      const badBefore = this.badRows;
      const rowsBefore = exports.ordinalCount();
      this.#parse(this.#filled, true);
      // A last line without its break that lacks fields was being written when the file was closed: not counted among the bad rows.
      if (isOpen && this.badRows === badBefore + 1 && exports.ordinalCount() === rowsBefore + 1) {
        this.truncatedLastRow = true;
        this.badRows--;
        const last = this.badRowExamples.at(-1);
        if (last !== undefined && last.line === exports.lineCount()) this.badRowExamples.pop();
      }
    }
    if (this.#failure === null && this.#kernel.exports.rowCount() > 0) this.#emit();
  }

  /** A run of NUL bytes (space that a logger reserved and never wrote) may be longer than any line. */
  #dropNuls(): boolean {
    const { text } = this.#kernel;
    let kept = 0;
    for (let i = 0; i < this.#filled; i++) if (text[i] !== 0) text[kept++] = text[i];
    const dropped = this.#filled - kept;
    if (dropped < this.#filled / 2) return false;
    this.skippedNulBytes += dropped;
    this.#filled = kept;
    return true;
  }

  /** Parses [0, end) of the text and moves what is left to its front. */
  #parse(end: number, isLast: boolean): void {
    const { exports, text, textPointer } = this.#kernel;
    let from = 0;
    while (this.#failure === null) {
      const stop = exports.parseRows(textPointer + from, textPointer + end, isLast ? 1 : 0);
      from = exports.consumedTo() - textPointer;
      this.#settle();
      if (stop === kernelStop.blockFull) this.#emit();
      else if (stop === kernelStop.tooManyFields) this.#failure ??= tooManyColumns(exports.lineCount() + 1);
      else if (stop !== kernelStop.listsFull) break;
    }
    text.copyWithin(0, from, this.#filled);
    this.#filled -= from;
  }

  /** Looks at the tokens and rows that the kernel set aside, and applies the numbers that mean "no value". */
  #settle(): void {
    const { exports, odd, bad, memory, columns, lines } = this.#kernel;
    const { decimal, codeFields, measuredFields } = this.#options;
    const oddTokens = exports.oddTokens();
    for (let i = 0; i < oddTokens; i++) {
      const row = odd[4 * i];
      const column = odd[4 * i + 1];
      const pointer = odd[4 * i + 2];
      const text = latin1(memory, pointer, pointer + Math.min(odd[4 * i + 3], 400)).trim();
      const field = this.#fieldOfColumn[column];
      const number =
        readNumber(text, decimal, this.#missing) ?? (codeFields.has(field) ? readCode(text) : null);
      if (number !== null) {
        columns[column][row] = number;
        continue;
      }
      const seen = this.unreadable.get(field);
      if (seen === undefined)
        this.unreadable.set(field, { count: 1, line: lines[row], text: text.slice(0, 40) });
      else seen.count++;
    }
    const listed = exports.badRowsListed();
    for (let i = 0; i < listed && this.badRowExamples.length < 8; i++) {
      const fields = bad[4 * i + 2];
      this.badRowExamples.push({
        line: bad[4 * i],
        reason:
          bad[4 * i + 1] === 0
            ? `${fields} ${fields === 1 ? 'column' : 'columns'} instead of ${this.#options.fieldCount}`
            : 'date or time cannot be read',
      });
    }
    this.badRows += exports.badRows();
    exports.clearLists();
    const rows = exports.rowCount();
    if (rows > this.#settledRows)
      for (const sentinel of this.#sentinels)
        for (let column = FIRST_NUMBER_COLUMN; column < columns.length; column++)
          if (measuredFields.has(this.#fieldOfColumn[column]))
            exports.blankOut(column, this.#settledRows, sentinel);
    this.#settledRows = rows;
  }

  #emit(): void {
    const { exports, columns, lines, ordinals } = this.#kernel;
    this.#failure = this.#options.onBlock({ rows: exports.rowCount(), columns, lines, ordinals });
    exports.nextBlock();
    this.#settledRows = 0;
  }
}
