/**
 * Rows of delimited text → columns of numbers. AssemblyScript, compiled by scripts/build-wasm.mjs into ../kernel.generated.ts.
 *
 * All memory is laid out by ../kernel.ts; nothing is allocated here. Text is taken in windows that stay in the nearest cache: first all
 * delimiters and line ends of a window are listed (64 bytes at a time), then each wanted column is converted over all rows of the window.
 * Rows the list cannot be trusted with (line breaks inside quotes, blank-delimited text, very long lines) go one by one through
 * `plainRow`, which follows the same rules slowly.
 *
 * A token is converted with one 16-byte load, a shuffle that drops the decimal mark and right-aligns the digits, three multiply-add
 * steps and ONE division: mantissa ÷ 10^k is correctly rounded, hence equal to Number(), while the mantissa is below 2^53 and k ≤ 22
 * (both operands are then exact doubles). Multiplying by 10^-k would not be. Whatever does not fit goes to `otherToken` (still exact),
 * and what that declines is listed for the caller.
 */

/** Full parse of a token by the caller; milliseconds or NaN. `which`: 0 date text, 1 time text. May write the prefix cache below. */
@external('host', 'resolveTime')
declare function resolveTime(which: i32, pointer: usize, length: i32): f64;

// ---- what to do with a field
const SKIP: i32 = -1;
const DATE_TEXT: i32 = 128;
const TIME_TEXT: i32 = 129;

// ---- why parseRows stopped
const USED_UP: i32 = 0;
const BLOCK_FULL: i32 = 1;
const LISTS_FULL: i32 = 2;
const INCOMPLETE: i32 = 3;
const TOO_MANY_FIELDS: i32 = 4;

const MAX_FIELDS: i32 = 4096;
const QUOTE_REACH: usize = 4096;
const POWER_ROW: u32 = 24;
const LANE_MASKS: usize = 80;
const COLUMN_FORMS: usize = 80 + 17 * 16;
/** Text that is listed at a time. */
const WINDOW_BYTES: usize = 24576;
/** Odd tokens that one window or one row can add at most. */
const ODD_RESERVE: i32 = 12288;

// ---- dialect and plan
let delimiter: u8 = 44;
let blanks: bool = false;
let newline: u8 = 10;
let decimalMark: u8 = 46;
let quoted: bool = false;
let planPointer: usize = 0;
let planLength: i32 = 0;
let expectedFields: i32 = 0;

// ---- memory
let shufflePointer: usize = 0;
let powersPointer: usize = 0;
let columnsPointer: usize = 0;
let maxRows: i32 = 0;
let linesPointer: usize = 0;
let ordinalsPointer: usize = 0;
let oddPointer: usize = 0;
let oddCapacity: i32 = 0;
let badPointer: usize = 0;
let badCapacity: i32 = 0;
let cachePointer: usize = 0;
let indexPointer: usize = 0;
let rowEndsPointer: usize = 0;
let constantsPointer: usize = 0;

// ---- state between calls
let row: i32 = 0;
let line: i32 = 0;
let ordinal: i32 = 0;
let consumed: usize = 0;
let oddCount: i32 = 0;
let badCount: i32 = 0;
let badListed: i32 = 0;

// @ts-ignore: a constant of the target
const LANES: v128 = i8x16(0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15);
// @ts-ignore: a constant of the target
const UPPER_LANES: v128 = i8x16(0, 0, 0, 0, 0, 0, 0, 0, -1, -1, -1, -1, -1, -1, -1, -1);

/** Result of `otherToken`. */
let value: f64 = NaN;

export function setDialect(delimiterByte: i32, isBlanks: i32, newlineByte: i32, decimalByte: i32, isQuoted: i32): void {
  delimiter = <u8>delimiterByte;
  blanks = isBlanks != 0;
  newline = <u8>newlineByte;
  decimalMark = <u8>decimalByte;
  quoted = isQuoted != 0;
}

export function setPlan(pointer: usize, length: i32, fields: i32): void {
  planPointer = pointer;
  planLength = length;
  expectedFields = fields;
}

export function setMemory(
  shuffle: usize,
  powers: usize,
  columns: usize,
  rows: i32,
  lines: usize,
  ordinals: usize,
  odd: usize,
  oddRoom: i32,
  bad: usize,
  badRoom: i32,
  cache: usize,
  index: usize,
  rowEnds: usize,
  constants: usize,
): void {
  shufflePointer = shuffle;
  powersPointer = powers;
  columnsPointer = columns;
  maxRows = rows;
  linesPointer = lines;
  ordinalsPointer = ordinals;
  oddPointer = odd;
  oddCapacity = oddRoom;
  badPointer = bad;
  badCapacity = badRoom;
  cachePointer = cache;
  indexPointer = index;
  rowEndsPointer = rowEnds;
  constantsPointer = constants;

  v128.store(constants, i8x16.splat(48));
  v128.store(constants, i8x16.splat(9), 16);
  v128.store(constants, i16x8.splat(2561), 32);
  v128.store(constants, i16x8(100, 1, 100, 1, 100, 1, 100, 1), 48);
  v128.store(constants, i16x8(10000, 1, 10000, 1, 10000, 1, 10000, 1), 64);

  // Shuffles by (length, position of the decimal mark): 17 × 17 entries of 16 bytes.
  for (let length = 0; length <= 16; length++) {
    for (let mark = 0; mark <= 16; mark++) {
      const entry = shuffle + <usize>((length * 17 + mark) << 4);
      const hasMark = mark < length;
      const digits = hasMark ? length - 1 : length;
      for (let lane = 0; lane < 16; lane++) {
        let source = lane - (16 - digits);
        if (source < 0) source = 255;
        else if (hasMark && source >= mark) source += 1;
        store<u8>(entry + lane, <u8>source);
      }
    }
  }
  // Entry 0 is for "no decimal mark", entry k + 1 for k decimals; a second row holds the same with a minus: dividing by −10^k is as
  // exact and gives a negative zero its sign.
  let power: f64 = 1;
  store<f64>(powers, power);
  for (let k = 0; k <= 22; k++) {
    store<f64>(powers + (<usize>(k + 1) << 3), power);
    power *= 10;
  }
  for (let k: u32 = 0; k < POWER_ROW; k++)
    store<f64>(powers + (<usize>(k + POWER_ROW) << 3), -load<f64>(powers + (<usize>k << 3)));

  // Masks that keep the last `length` lanes.
  for (let length = 0; length <= 16; length++)
    for (let lane = 0; lane < 16; lane++)
      store<u8>(constants + LANE_MASKS + <usize>((length << 4) + lane), lane >= 16 - length ? 255 : 0);
}

/** Column forms: 0 decimals that tokens usually have (−1: no mark) · 4 windows still to read token by token. */
function forgetForms(): void {
  for (let column: usize = 0; column < 128; column++) {
    store<i32>(constantsPointer + COLUMN_FORMS + (column << 3), -1);
    store<i32>(constantsPointer + COLUMN_FORMS + (column << 3), 0, 4);
  }
}

export function start(firstLine: i32): void {
  row = 0;
  line = firstLine;
  ordinal = 0;
  oddCount = 0;
  badCount = 0;
  badListed = 0;
  timePrefixLength = 0;
  dateLength = -1;
  forgetForms();
}

export function nextBlock(): void {
  row = 0;
}

export function clearLists(): void {
  oddCount = 0;
  badCount = 0;
  badListed = 0;
}

export function rowCount(): i32 {
  return row;
}
export function lineCount(): i32 {
  return line;
}
export function ordinalCount(): i32 {
  return ordinal;
}
export function consumedTo(): usize {
  return consumed;
}
export function oddTokens(): i32 {
  return oddCount;
}
export function badRows(): i32 {
  return badCount;
}
export function badRowsListed(): i32 {
  return badListed;
}

/**
 * A plain decimal token of 1–16 characters: [-]digits[mark digits]. NaN when the token is anything else.
 * The constants are read from memory once by the caller, so that a loop can hold them in registers.
 */
@inline
function plainToken(
  pointer: usize,
  end: usize,
  marks: v128,
  zeros: v128,
  nines: v128,
  pairWeights: v128,
  quadWeights: v128,
  eightWeights: v128,
  shuffles: usize,
  powers: usize,
): f64 {
  const negative = <u32>(load<u8>(pointer) == 45);
  const first = pointer + negative;
  const length = <u32>(end - first);
  if (length - 1 > 15) return NaN;
  const text = v128.load(first);
  const markAt = ctz(<u32>i8x16.bitmask(i8x16.eq(text, marks)) | (1 << length));
  const digits = i8x16.swizzle(i8x16.sub(text, zeros), v128.load(shuffles + <usize>((length * 17 + markAt) << 4)));
  // Two digits a lane: (tens + 256 ones) × 2561 holds 10 tens + ones in its upper byte.
  const pairs = i16x8.shr_u(i16x8.mul(digits, pairWeights), 8);
  const quads = i32x4.dot_i16x8_s(pairs, quadWeights);
  const eights = i64x2.extract_lane(i32x4.dot_i16x8_s(i16x8.narrow_i32x4_s(quads, quads), eightWeights), 0);
  const whole = (eights & 0xffffffff) * 100000000 + (eights >>> 32);
  if (v128.any_true(i8x16.sub_sat_u(digits, nines))) return NaN;
  // A mark alone has no digits; a whole part of 2^53 or more may not be exact.
  if (<i32>(length + markAt == 1) | <i32>(whole >>> 53 != 0)) return NaN;
  lastDecimals = <i32>(length - markAt) - 1;
  return <f64>whole / load<f64>(powers + (<usize>(length - markAt + negative * POWER_ROW) << 3));
}

/** Decimals of the token last read by `plainToken`; −1 when it had no mark. */
let lastDecimals: i32 = -1;

/** The same for a single token. */
function onePlainToken(pointer: usize, end: usize, mark: u8): f64 {
  const constants = constantsPointer;
  return plainToken(
    pointer,
    end,
    i8x16.splat(mark),
    v128.load(constants),
    v128.load(constants, 16),
    v128.load(constants, 32),
    v128.load(constants, 48),
    v128.load(constants, 64),
    shufflePointer,
    powersPointer,
  );
}

@inline
function lower(byte: u8): u8 {
  return byte | 32;
}

/**
 * Any other decimal numeral whose value is one exact operation away: signs, exponents, up to 19 digits with a whole part below 2^53.
 * Also "nan" in any case. Returns false for the rest, which the caller of the module looks at.
 */
function otherToken(pointer: usize, length: i32): bool {
  const end = pointer + <usize>length;
  let at = pointer;
  if (
    length == 3 &&
    lower(load<u8>(at)) == 110 &&
    lower(load<u8>(at, 1)) == 97 &&
    lower(load<u8>(at, 2)) == 110
  ) {
    value = NaN;
    return true;
  }
  let negative = false;
  const sign = load<u8>(at);
  if (sign == 45 || sign == 43) {
    negative = sign == 45;
    at++;
  }
  let whole: u64 = 0;
  let digits = 0;
  let significant = 0;
  let decimals = 0;
  let seenMark = false;
  while (at < end) {
    const byte = load<u8>(at);
    const digit = byte - 48;
    if (digit <= 9) {
      digits++;
      if (significant > 0 || digit != 0) significant++;
      if (significant > 19) return false;
      whole = whole * 10 + digit;
      if (seenMark) decimals++;
    } else if (byte == decimalMark && !seenMark) {
      seenMark = true;
    } else {
      break;
    }
    at++;
  }
  if (digits == 0 || whole >> 53 != 0) return false;
  let exponent = 0;
  if (at < end) {
    if (lower(load<u8>(at)) != 101) return false;
    at++;
    let exponentNegative = false;
    if (at < end) {
      const exponentSign = load<u8>(at);
      if (exponentSign == 45 || exponentSign == 43) {
        exponentNegative = exponentSign == 45;
        at++;
      }
    }
    if (at >= end) return false;
    while (at < end) {
      const digit = load<u8>(at) - 48;
      if (digit > 9) return false;
      exponent = exponent * 10 + digit;
      if (exponent > 400) return false;
      at++;
    }
    if (exponentNegative) exponent = -exponent;
  }
  const shift = decimals - exponent;
  if (shift > 22 || shift < -22) return false;
  const size =
    shift >= 0
      ? <f64>whole / load<f64>(powersPointer + (<usize>(shift + 1) << 3))
      : <f64>whole * load<f64>(powersPointer + (<usize>(1 - shift) << 3));
  value = negative ? -size : size;
  return true;
}

// ---- time texts
// cache at cachePointer: 0 time prefix (32 bytes) · 32 date text (32 bytes)
let timePrefixLength: i32 = 0;
let timePrefixMask: i32 = 0;
let timeBase: f64 = NaN;
let timeMark: u8 = 46;
let dateLength: i32 = -1;
let dateValue: f64 = NaN;

/** The caller found that the first `length` bytes of the last time text stand for `base` milliseconds and that only seconds follow. */
export function rememberPrefix(length: i32, base: f64, markByte: i32): void {
  timePrefixLength = length;
  timePrefixMask = length >= 32 ? -1 : (1 << length) - 1;
  timeBase = base;
  timeMark = <u8>markByte;
}

@inline
function equalBytes(a: usize, b: usize): i32 {
  return (
    i8x16.bitmask(i8x16.eq(v128.load(a), v128.load(b))) |
    (i8x16.bitmask(i8x16.eq(v128.load(a, 16), v128.load(b, 16))) << 16)
  );
}

function timeText(pointer: usize, length: i32): f64 {
  const prefix = timePrefixLength;
  if (prefix > 0) {
    let rest = length - prefix;
    const at = pointer + <usize>prefix;
    // A closing Z (UTC) belongs to the text that was resolved.
    if (rest > 0 && load<u8>(at + <usize>(rest - 1)) == 90) rest--;
    if (
      rest > 0 &&
      rest <= 16 &&
      (equalBytes(pointer, cachePointer) & timePrefixMask) == timePrefixMask
    ) {
      const seconds = onePlainToken(at, at + <usize>rest, timeMark);
      if (seconds >= 0 && seconds < 61) return timeBase + seconds * 1000;
    }
  }
  timePrefixLength = 0;
  const resolved = resolveTime(1, pointer, length);
  if (timePrefixLength > 0) {
    v128.store(cachePointer, v128.load(pointer));
    v128.store(cachePointer, v128.load(pointer, 16), 16);
  }
  return resolved;
}

function dateText(pointer: usize, length: i32): f64 {
  const cache = cachePointer + 32;
  if (length == dateLength) {
    const mask = length >= 32 ? -1 : (1 << length) - 1;
    if ((equalBytes(pointer, cache) & mask) == mask) return dateValue;
  }
  dateValue = resolveTime(0, pointer, length);
  if (length <= 32) {
    dateLength = length;
    v128.store(cache, v128.load(pointer));
    v128.store(cache, v128.load(pointer, 16), 16);
  } else {
    dateLength = -1;
  }
  return dateValue;
}

/** Values equal to a number that stands for "no value" become NaN, in one column, from row `first` to the last. */
export function blankOut(column: i32, first: i32, sentinel: f64): void {
  const base = columnsPointer + <usize>column * (<usize>maxRows << 3);
  const wanted = f64x2.splat(sentinel);
  const nothing = f64x2.splat(NaN);
  const to = base + (<usize>row << 3);
  let at = base + (<usize>first << 3);
  for (; at + 16 <= to; at += 16) {
    const pair = v128.load(at);
    v128.store(at, v128.bitselect(nothing, pair, f64x2.eq(pair, wanted)));
  }
  if (at < to && load<f64>(at) == sentinel) store<f64>(at, NaN);
}

// ---- rows

/** End of the quoted text that opens at `at`: position of the closing quote, 0 when there is none within reach, 1 when `end` came first. */
function closingQuote(at: usize, end: usize): usize {
  const limit = at + QUOTE_REACH;
  let position = at + 1;
  while (true) {
    if (position >= end) return 1;
    if (position >= limit) return 0;
    const mask = i8x16.bitmask(i8x16.eq(v128.load(position), i8x16.splat(34)));
    if (mask == 0) {
      position += 16;
      continue;
    }
    position += <usize>ctz(mask);
    if (position >= end) return 1;
    if (load<u8>(position, 1) != 34) return position;
    position += 2;
  }
}

/** A number field as it stands between two delimiters, `text` to `textEnd`: blanks, quotes and a carriage return may surround it. */
function numberField(column: i32, atRow: i32, text: usize, textEnd: usize): void {
  let from = text;
  let to = textEnd;
  while (to > from && (load<u8>(to - 1) == 32 || load<u8>(to - 1) == 13)) to--;
  while (to > from && load<u8>(from) == 32) from++;
  if (quoted && to - from >= 2 && load<u8>(from) == 34 && load<u8>(to - 1) == 34) {
    from++;
    to--;
    while (to > from && load<u8>(to - 1) == 32) to--;
    while (to > from && load<u8>(from) == 32) from++;
  }
  const length = <i32>(to - from);
  let result = NaN;
  if (length > 0) result = onePlainToken(from, to, decimalMark);
  if (length > 0 && result != result && otherToken(from, length)) {
    result = value;
  } else if (length > 0 && result != result) {
    const entry = oddPointer + (<usize>oddCount << 4);
    store<i32>(entry, atRow);
    store<i32>(entry, column, 4);
    store<u32>(entry, <u32>from, 8);
    store<i32>(entry, length, 12);
    oddCount++;
  }
  store<f64>(columnsPointer + <usize>column * (<usize>maxRows << 3) + (<usize>atRow << 3), result);
}

/** A date or time field between two delimiters → its column; false when it cannot be read. */
function timeField(action: i32, atRow: i32, text: usize, textEnd: usize): bool {
  let from = text;
  let to = textEnd;
  while (to > from && (load<u8>(to - 1) == 32 || load<u8>(to - 1) == 13)) to--;
  while (to > from && load<u8>(from) == 32) from++;
  if (quoted && to - from >= 2 && load<u8>(from) == 34 && load<u8>(to - 1) == 34) {
    from++;
    to--;
  }
  const length = <i32>(to - from);
  if (length == 0) return false;
  const column: usize = action == TIME_TEXT ? 1 : 0;
  const result = action == TIME_TEXT ? timeText(from, length) : dateText(from, length);
  store<f64>(columnsPointer + column * (<usize>maxRows << 3) + (<usize>atRow << 3), result);
  return result == result;
}

function reportBadRow(code: i32, fields: i32, atLine: i32, atOrdinal: i32): void {
  if (badListed < badCapacity) {
    const entry = badPointer + (<usize>badListed << 4);
    store<i32>(entry, atLine);
    store<i32>(entry, code, 4);
    store<i32>(entry, fields, 8);
    store<i32>(entry, atOrdinal, 12);
    badListed++;
  }
  badCount++;
}

/** End of the row last read by `plainRow`. */
let rowEnd: usize = 0;

/** One row, field by field. Returns USED_UP when it was read (well or badly), else why not. */
function plainRow(from: usize, end: usize, isLast: i32): i32 {
  const byteA = delimiter;
  const byteB: u8 = blanks ? 9 : delimiter;
  const delimiterA = i8x16.splat(byteA);
  const delimiterB = i8x16.splat(byteB);
  const newlines = i8x16.splat(newline);
  const isBlanks = blanks;
  const lineEnd = newline;
  const oddBefore = oddCount;
  let at = from;
  let fields = 0;
  let extraLines = 0;
  let timeReadable = true;
  let blankLine = false;

  while (true) {
    let first = load<u8>(at);
    while (first == 32 || (isBlanks && (first == 9 || (first == 13 && lineEnd != 13)))) {
      at++;
      first = load<u8>(at);
    }
    if (isBlanks && first == lineEnd) {
      blankLine = fields == 0;
      at++;
      break;
    }
    const tokenStart = at;
    let tokenEnd: usize = 0;
    if (quoted && first == 34) {
      const close = closingQuote(at, end);
      if (close == 1 && !isLast && end - at < QUOTE_REACH) {
        oddCount = oddBefore;
        return INCOMPLETE;
      }
      if (close > 1) {
        let after = close + 1;
        let byte = load<u8>(after);
        while ((byte == 32 && byteA != 32) || (byte == 13 && lineEnd != 13)) {
          after++;
          byte = load<u8>(after);
        }
        if (byte == byteA || byte == byteB || byte == lineEnd) {
          for (let inner = at; inner < close; inner++) if (load<u8>(inner) == lineEnd) extraLines++;
          tokenEnd = close + 1;
          at = after;
        }
      }
    }
    if (tokenEnd == 0) {
      let ends = 0;
      while (true) {
        const text = v128.load(at);
        ends = i8x16.bitmask(
          v128.or(v128.or(i8x16.eq(text, delimiterA), i8x16.eq(text, delimiterB)), i8x16.eq(text, newlines)),
        );
        if (ends != 0) break;
        at += 16;
      }
      at += <usize>ctz(ends);
      tokenEnd = at;
    }
    const isRowEnd = load<u8>(at) == lineEnd;
    const action = fields < planLength ? load<i32>(planPointer + (<usize>fields << 2)) : SKIP;
    if (action != SKIP) {
      if (action < DATE_TEXT) numberField(action, row, tokenStart, tokenEnd);
      else if (!timeField(action, row, tokenStart, tokenEnd)) timeReadable = false;
    }
    fields++;
    at++;
    if (isRowEnd) {
      if (fields == 1) {
        let last = tokenEnd;
        while (last > tokenStart && load<u8>(last - 1) == 13) last--;
        blankLine = last == tokenStart;
      }
      break;
    }
    if (fields > MAX_FIELDS) {
      oddCount = oddBefore;
      return TOO_MANY_FIELDS;
    }
  }

  line++;
  if (!blankLine) {
    if (fields == expectedFields && timeReadable) {
      store<i32>(linesPointer + (<usize>row << 2), line);
      store<i32>(ordinalsPointer + (<usize>row << 2), ordinal);
      row++;
    } else {
      oddCount = oddBefore;
      reportBadRow(fields == expectedFields ? 1 : 0, fields, line, ordinal);
    }
    ordinal++;
  }
  line += extraLines;
  rowEnd = at;
  return USED_UP;
}

/** Rows and text end of the window last listed. */
let listedRows: i32 = 0;

/**
 * Lists the positions of delimiters and line ends in [from, end) at `indexPointer`, after a first entry from − 1, and the number of the
 * entry of each line end at `rowEndsPointer`. Stops before the row in which a line break stands between quotes.
 */
function listWindow(from: usize, end: usize): void {
  const delimiters = i8x16.splat(delimiter);
  const newlines = i8x16.splat(newline);
  const quotes = i8x16.splat(34);
  const isQuoted = quoted;
  let slot = indexPointer;
  store<u32>(slot, <u32>(from - 1));
  slot += 4;
  let ends = rowEndsPointer;
  let inside: u64 = 0;
  for (let at = from; at < end; at += 64) {
    const a = v128.load(at);
    const b = v128.load(at, 16);
    const c = v128.load(at, 32);
    const d = v128.load(at, 48);
    const na = i8x16.eq(a, newlines);
    const nb = i8x16.eq(b, newlines);
    const nc = i8x16.eq(c, newlines);
    const nd = i8x16.eq(d, newlines);
    let breaks: u64 =
      <u64>(<u32>i8x16.bitmask(na)) |
      (<u64>(<u32>i8x16.bitmask(nb)) << 16) |
      (<u64>(<u32>i8x16.bitmask(nc)) << 32) |
      (<u64>(<u32>i8x16.bitmask(nd)) << 48);
    let stops: u64 =
      <u64>(<u32>i8x16.bitmask(v128.or(na, i8x16.eq(a, delimiters)))) |
      (<u64>(<u32>i8x16.bitmask(v128.or(nb, i8x16.eq(b, delimiters)))) << 16) |
      (<u64>(<u32>i8x16.bitmask(v128.or(nc, i8x16.eq(c, delimiters)))) << 32) |
      (<u64>(<u32>i8x16.bitmask(v128.or(nd, i8x16.eq(d, delimiters)))) << 48);
    if (end - at < 64) {
      const valid = (<u64>1 << <u64>(end - at)) - 1;
      breaks &= valid;
      stops &= valid;
    }
    if (isQuoted) {
      let marks: u64 =
        <u64>(<u32>i8x16.bitmask(i8x16.eq(a, quotes))) |
        (<u64>(<u32>i8x16.bitmask(i8x16.eq(b, quotes))) << 16) |
        (<u64>(<u32>i8x16.bitmask(i8x16.eq(c, quotes))) << 32) |
        (<u64>(<u32>i8x16.bitmask(i8x16.eq(d, quotes))) << 48);
      // Running parity of the quotes: 1 from an opening quote up to its closing one.
      if (marks != 0) {
        marks ^= marks << 1;
        marks ^= marks << 2;
        marks ^= marks << 4;
        marks ^= marks << 8;
        marks ^= marks << 16;
        marks ^= marks << 32;
      }
      marks ^= inside;
      inside = <u64>(<i64>marks >> 63);
      const hidden = breaks & marks;
      if (hidden != 0) {
        // Only the rows that end before it are good.
        const before = ((hidden & (0 - hidden)) - 1) & ~marks;
        breaks &= before;
        stops &= before;
        end = 0;
      } else {
        stops &= ~marks;
      }
    }
    const entries = <u32>((slot - indexPointer) >> 2);
    let pending = breaks;
    while (pending != 0) {
      store<u32>(ends, entries + <u32>popcnt(stops & ((pending & (0 - pending)) - 1)));
      ends += 4;
      pending &= pending - 1;
    }
    // Eight at a time, whether or not there are as many: what is too much is overwritten.
    const count = <usize>popcnt(stops);
    let target = slot;
    while (true) {
      for (let unrolled = 0; unrolled < 8; unrolled++) {
        store<u32>(target + (<usize>unrolled << 2), <u32>at + <u32>ctz(stops));
        stops &= stops - 1;
      }
      if (stops == 0) break;
      target += 32;
    }
    slot += count << 2;
  }
  listedRows = <i32>((ends - rowEndsPointer) >> 2);
}

/**
 * One number column over the rows of a window. Tokens of a column mostly have the same number of decimals, so two at a time are loaded
 * right-aligned and taken to have the usual form: mark where expected, at most eight digits. Where that does not hold, they are read
 * one by one; a column that rarely keeps to a form is read that way for some windows.
 */
function numberColumn(column: i32, field: i32, rows: i32): void {
  const constants = constantsPointer;
  const marks = i8x16.splat(decimalMark);
  const zeros = v128.load(constants);
  const nines = v128.load(constants, 16);
  const pairWeights = v128.load(constants, 32);
  const quadWeights = v128.load(constants, 48);
  const eightWeights = v128.load(constants, 64);
  const shuffles = shufflePointer;
  const powers = powersPointer;
  const masks = constants + LANE_MASKS;
  const positions = indexPointer + (<usize>field << 2);
  const bases = rowEndsPointer;
  const form = constants + COLUMN_FORMS + (<usize>column << 3);
  const target = columnsPointer + <usize>column * (<usize>maxRows << 3) + (<usize>row << 3);

  const wait = load<i32>(form, 4);
  let misses = 0;
  let k = 0;
  if (wait > 0) {
    store<i32>(form, wait - 1, 4);
  } else {
    let decimals = load<i32>(form);
    while (k + 1 < rows) {
      // Constants of the form: what is subtracted, the highest value then allowed, the shuffles into either half.
      let base = zeros;
      let limit = nines;
      let shortest: u32 = 1;
      let span: u32 = 7;
      let entry: u32 = 0;
      if (decimals >= 0) {
        const atMark = i8x16.eq(i8x16.splat(<i8>(15 - decimals)), LANES);
        base = v128.bitselect(marks, zeros, atMark);
        limit = v128.andnot(nines, atMark);
        shortest = decimals == 0 ? 2 : decimals + 1;
        span = 9 - shortest;
        entry = decimals + 1;
      }
      // Lane l of the upper half takes lane l (behind the mark) or l − 1 (before it); the lower half the same, eight lanes on.
      const source = i8x16.sub(LANES, v128.and(i8x16.splat(1), i8x16.le_s(LANES, i8x16.splat(<i8>(15 - decimals)))));
      const upperHalf = v128.or(decimals >= 0 ? source : LANES, v128.not(UPPER_LANES));
      const lowerHalf = i8x16.swizzle(upperHalf, i8x16(8, 9, 10, 11, 12, 13, 14, 15, -1, -1, -1, -1, -1, -1, -1, -1));
      const lowerShuffle = v128.or(lowerHalf, UPPER_LANES);
      let streak = 0;
      let streakDecimals = -2;

      while (k + 1 < rows) {
        const aroundA = load<u64>(positions + (<usize>load<u32>(bases + (<usize>k << 2)) << 2));
        const aroundB = load<u64>(positions + (<usize>load<u32>(bases + (<usize>k << 2), 4) << 2));
        const fromA = <usize>(<u32>aroundA + 1);
        const fromB = <usize>(<u32>aroundB + 1);
        const toA = <usize>(aroundA >> 32);
        const toB = <usize>(aroundB >> 32);
        const negativeA = <u32>(load<u8>(fromA) == 45);
        const negativeB = <u32>(load<u8>(fromB) == 45);
        const lengthA = <u32>(toA - fromA) - negativeA;
        const lengthB = <u32>(toB - fromB) - negativeB;
        if (<i32>(lengthA - shortest <= span) & <i32>(lengthB - shortest <= span)) {
          const a = v128.and(i8x16.sub(v128.load(toA - 16), base), v128.load(masks + (<usize>lengthA << 4)));
          const b = v128.and(i8x16.sub(v128.load(toB - 16), base), v128.load(masks + (<usize>lengthB << 4)));
          if (!v128.any_true(v128.or(i8x16.sub_sat_u(a, limit), i8x16.sub_sat_u(b, limit)))) {
            const digits = v128.or(i8x16.swizzle(a, lowerShuffle), i8x16.swizzle(b, upperHalf));
            const pairs = i16x8.shr_u(i16x8.mul(digits, pairWeights), 8);
            const quads = i32x4.dot_i16x8_s(pairs, quadWeights);
            const wholes = i32x4.dot_i16x8_s(i16x8.narrow_i32x4_s(quads, quads), eightWeights);
            const divisors = v128.load_lane<u64>(
              powers + (<usize>(entry + negativeB * POWER_ROW) << 3),
              v128.load64_zero(powers + (<usize>(entry + negativeA * POWER_ROW) << 3)),
              1,
            );
            v128.store(target + (<usize>k << 3), f64x2.div(f64x2.convert_low_i32x4_s(wholes), divisors));
            k += 2;
            streak = 0;
            continue;
          }
        }
        misses++;
        const to = k + 2;
        for (; k < to; k++) {
          const around = load<u64>(positions + (<usize>load<u32>(bases + (<usize>k << 2)) << 2));
          const number = plainToken(
            <usize>(<u32>around + 1),
            <usize>(around >> 32),
            marks,
            zeros,
            nines,
            pairWeights,
            quadWeights,
            eightWeights,
            shuffles,
            powers,
          );
          if (number == number) {
            store<f64>(target + (<usize>k << 3), number);
            if (lastDecimals != decimals) {
              if (lastDecimals != streakDecimals) streak = 0;
              streakDecimals = lastDecimals;
              streak++;
            }
          } else {
            numberField(column, row + k, <usize>(<u32>around + 1), <usize>(around >> 32));
          }
        }
        if (streak >= 4 && streakDecimals <= 8) {
          decimals = streakDecimals;
          break;
        }
      }
    }
    store<i32>(form, decimals);
    if (misses * 6 > rows) store<i32>(form, 15, 4);
  }

  for (; k < rows; k++) {
    const around = load<u64>(positions + (<usize>load<u32>(bases + (<usize>k << 2)) << 2));
    const from = <usize>(<u32>around + 1);
    const to = <usize>(around >> 32);
    const number = plainToken(
      from,
      to,
      marks,
      zeros,
      nines,
      pairWeights,
      quadWeights,
      eightWeights,
      shuffles,
      powers,
    );
    if (number == number) store<f64>(target + (<usize>k << 3), number);
    else numberField(column, row + k, from, to);
  }
}

/**
 * Time texts of a window whose beginning is that of the text before, so that only seconds need reading.
 * Stops at the first that is anything else; returns its number.
 */
function timesAlike(field: i32, first: i32, rows: i32): i32 {
  const prefix = <usize>timePrefixLength;
  if (prefix == 0) return first;
  const constants = constantsPointer;
  const marks = i8x16.splat(timeMark);
  const zeros = v128.load(constants);
  const nines = v128.load(constants, 16);
  const pairWeights = v128.load(constants, 32);
  const quadWeights = v128.load(constants, 48);
  const eightWeights = v128.load(constants, 64);
  const shuffles = shufflePointer;
  const powers = powersPointer;
  const start0 = v128.load(cachePointer);
  const start1 = v128.load(cachePointer, 16);
  const differs0 = i8x16.lt_u(LANES, i8x16.splat(<i8>prefix));
  const differs1 = i8x16.lt_s(LANES, i8x16.splat(<i8>(<i32>prefix - 16)));
  const base = timeBase;
  const positions = indexPointer + (<usize>field << 2);
  const bases = rowEndsPointer;
  const target = columnsPointer + (<usize>maxRows << 3) + (<usize>row << 3);
  const quote: u8 = quoted ? 34 : 0;
  let k = first;
  for (; k < rows; k++) {
    const around = load<u64>(positions + (<usize>load<u32>(bases + (<usize>k << 2)) << 2));
    let from = <usize>(<u32>around + 1);
    let to = <usize>(around >> 32);
    if (load<u8>(from) == quote && load<u8>(to - 1) == quote) {
      from++;
      to--;
    }
    const off = v128.or(
      v128.and(v128.xor(v128.load(from), start0), differs0),
      v128.and(v128.xor(v128.load(from, 16), start1), differs1),
    );
    if (v128.any_true(off)) break;
    const seconds = plainToken(
      from + prefix,
      to,
      marks,
      zeros,
      nines,
      pairWeights,
      quadWeights,
      eightWeights,
      shuffles,
      powers,
    );
    if (!(seconds >= 0 && seconds < 61)) break;
    store<f64>(target + (<usize>k << 3), base + seconds * 1000);
  }
  return k;
}

/** A date or time column over the rows of a window; unreadable rows leave the list. Returns the rows that stay. */
function timeColumn(action: i32, field: i32, rows: i32): i32 {
  const positions = indexPointer + (<usize>field << 2);
  const bases = rowEndsPointer;
  const dates = columnsPointer + (<usize>row << 3);
  let kept = 0;
  for (let k = 0; k < rows; k++) {
    if (kept == k && action == TIME_TEXT) {
      k = timesAlike(field, k, rows);
      kept = k;
      if (k >= rows) break;
    }
    const base = load<u32>(bases + (<usize>k << 2));
    const around = load<u64>(positions + (<usize>base << 2));
    const atLine = load<i32>(linesPointer + (<usize>(row + k) << 2));
    const atOrdinal = load<i32>(ordinalsPointer + (<usize>(row + k) << 2));
    if (timeField(action, row + kept, <usize>(<u32>around + 1), <usize>(around >> 32))) {
      if (kept != k) {
        store<u32>(bases + (<usize>kept << 2), base);
        store<i32>(linesPointer + (<usize>(row + kept) << 2), atLine);
        store<i32>(ordinalsPointer + (<usize>(row + kept) << 2), atOrdinal);
        // The date is read before the time: it moves along.
        if (action == TIME_TEXT) store<f64>(dates + (<usize>kept << 3), load<f64>(dates + (<usize>k << 3)));
      }
      kept++;
    } else {
      reportBadRow(1, expectedFields, atLine, atOrdinal);
    }
  }
  return kept;
}

/**
 * Reads whole rows from [from, end). `end` lies just behind a newline byte; at least 64 bytes behind it are readable.
 * Stops when the text is used up, the block is full, a list is full, or a quoted text runs past `end` (unless `isLast`).
 */
export function parseRows(from: usize, end: usize, isLast: i32): i32 {
  let at = from;
  let stop = USED_UP;

  while (at < end) {
    if (row >= maxRows) {
      stop = BLOCK_FULL;
      break;
    }
    if (oddCount + ODD_RESERVE > oddCapacity) {
      stop = LISTS_FULL;
      break;
    }

    let rows = 0;
    if (!blanks) {
      listWindow(at, min<usize>(end, at + WINDOW_BYTES));
      rows = listedRows;
    }
    if (rows == 0) {
      stop = plainRow(at, end, isLast);
      if (stop != USED_UP) break;
      at = rowEnd;
      continue;
    }

    // Rows with the right number of fields; their first entries replace the list of row ends.
    const room = maxRows - row;
    let good = 0;
    let previous: u32 = 0;
    for (let k = 0; k < rows && good < room; k++) {
      const last = load<u32>(rowEndsPointer + (<usize>k << 2));
      const fields = <i32>(last - previous);
      line++;
      if (fields == expectedFields && fields != 1) {
        store<u32>(rowEndsPointer + (<usize>good << 2), previous);
        store<i32>(linesPointer + (<usize>(row + good) << 2), line);
        store<i32>(ordinalsPointer + (<usize>(row + good) << 2), ordinal);
        ordinal++;
        good++;
      } else {
        let isBlank = false;
        if (fields == 1) {
          const lineFrom = <usize>load<u32>(indexPointer + (<usize>previous << 2)) + 1;
          let lineTo = <usize>load<u32>(indexPointer + (<usize>last << 2));
          while (lineTo > lineFrom && (load<u8>(lineTo - 1) == 13 || load<u8>(lineTo - 1) == 32)) lineTo--;
          isBlank = lineTo == lineFrom;
        }
        if (fields > MAX_FIELDS) {
          line--;
          stop = TOO_MANY_FIELDS;
          break;
        }
        if (!isBlank) {
          if (fields == expectedFields) {
            store<u32>(rowEndsPointer + (<usize>good << 2), previous);
            store<i32>(linesPointer + (<usize>(row + good) << 2), line);
            store<i32>(ordinalsPointer + (<usize>(row + good) << 2), ordinal);
            good++;
          } else {
            reportBadRow(0, fields, line, ordinal);
          }
          ordinal++;
        }
      }
      previous = last;
    }
    at = <usize>load<u32>(indexPointer + (<usize>previous << 2)) + 1;

    for (let field = 0; field < planLength; field++) {
      const action = load<i32>(planPointer + (<usize>field << 2));
      if (action == DATE_TEXT) good = timeColumn(action, field, good);
    }
    for (let field = 0; field < planLength; field++) {
      const action = load<i32>(planPointer + (<usize>field << 2));
      if (action == TIME_TEXT) good = timeColumn(action, field, good);
    }
    for (let field = 0; field < planLength; field++) {
      const action = load<i32>(planPointer + (<usize>field << 2));
      if (action != SKIP && action < DATE_TEXT) numberColumn(action, field, good);
    }
    row += good;
    if (stop != USED_UP) break;
  }

  consumed = at;
  return stop;
}
