import type { Layout } from '../schemas/layout';
import { MAX_FIELDS } from './kernel';
import { RecordError } from './record-error';
import { timeFields } from './time-reader';
import { fieldsOf } from './preview';
import type { DelimiterName } from './token';

/** What the first bytes of a file show about it. */
export interface Opening {
  /** First byte behind the header lines. */
  bodyOffset: number;
  newline: 10 | 13;
  headerLines: string[];
  /** Fields of most rows. */
  fieldCount: number;
}

/** Text that is looked at before reading begins. */
export const OPENING_BYTES = 128 * 1024;
/** A header longer than this is not one. */
export const MAX_HEADER_BYTES = 2 * 1024 * 1024;
const SAMPLE_ROWS = 100;

const delimiterNames: Record<DelimiterName, string> = {
  comma: 'comma',
  semicolon: 'semicolon',
  tab: 'tab',
  blanks: 'blanks',
  pipe: 'vertical bar',
};

/** Highest field that the layout needs. */
export function highestField(layout: Layout): number {
  const time = timeFields(layout.time);
  return Math.max(
    ...layout.columns.map((c) => c.index),
    time.dateText ?? 0,
    time.timeText ?? 0,
    ...time.numbers,
  );
}

function countFields(line: string, delimiter: DelimiterName, quoted: boolean): number {
  return fieldsOf(quoted ? line : line.replace(/"/g, ''), delimiter).length;
}

/** Is this text at all? */
export function checkText(bytes: Uint8Array): RecordError | null {
  const head = bytes.subarray(0, 4096);
  const safe = 'The file was kept as it is.';
  if (head[0] === 0x1f && head[1] === 0x8b)
    return new RecordError('compressed', {
      message: 'gzip data where text was expected',
      userMessage: `The file is packed (gzip). ${safe} Unpack it, or bring it in with its name ending in .gz.`,
    });
  if (head[0] === 0x50 && head[1] === 0x4b && head[2] === 3 && head[3] === 4)
    return new RecordError('compressed', {
      message: 'zip archive where text was expected',
      userMessage: `The file is a zip archive. ${safe} Unpack it and bring in the files inside.`,
    });
  const isWide = (head[0] === 0xff && head[1] === 0xfe) || (head[0] === 0xfe && head[1] === 0xff);
  let nuls = 0;
  let controls = 0;
  for (const byte of head) {
    if (byte === 0) nuls++;
    else if (byte < 9 || (byte > 13 && byte < 32 && byte !== 26 && byte !== 27)) controls++;
  }
  if (isWide || nuls > head.length / 3)
    if (isWide || (nuls < head.length * 0.6 && controls === 0))
      return new RecordError('not-text', {
        message: 'UTF-16 text',
        userMessage: `The file is text with two bytes a character (UTF-16). ${safe} Save it as UTF-8 or plain text and bring it in again.`,
      });
  if (nuls > 0 || controls > head.length / 20)
    return new RecordError('not-text', {
      message: `binary data: ${nuls} NUL and ${controls} control bytes in the first ${head.length}`,
      userMessage: `The file is not text: it begins with binary data. ${safe} Bring in the logger's text output, or convert the file first.`,
    });
  return null;
}

/**
 * Header, line ends and number of fields from a file's first bytes.
 *
 * @param isWhole whether `bytes` is all there is
 * @returns `more` when the header is not complete yet
 */
export function openText(
  bytes: Uint8Array,
  layout: Layout,
  isWhole: boolean,
): Opening | RecordError | 'more' {
  const notText = checkText(bytes);
  if (notText !== null) return notText;
  let at = bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf ? 3 : 0;
  const newline: 10 | 13 = bytes.includes(10) || !bytes.includes(13) ? 10 : 13;

  const decoder = new TextDecoder();
  const nextLine = (): string | null => {
    const end = bytes.indexOf(newline, at);
    if (end === -1 && (!isWhole || at >= bytes.length)) return null;
    const to = end === -1 ? bytes.length : end;
    const text = decoder.decode(bytes.subarray(at, Math.min(to, at + 65536)));
    at = end === -1 ? bytes.length : end + 1;
    return text.replace(/\r+$/, '');
  };

  const headerLines: string[] = [];
  while (headerLines.length < layout.headerRows) {
    const line = nextLine();
    if (line === null) {
      if (isWhole) break;
      if (bytes.length < MAX_HEADER_BYTES) return 'more';
      return new RecordError('header-too-long', {
        message: `no end of the ${layout.headerRows} header lines within ${MAX_HEADER_BYTES} bytes`,
        userMessage: `The first ${layout.headerRows} lines are longer than 2 MiB, so this does not look like a record with a header. The file was kept as it is. Check the number of header lines in the layout.`,
        line: headerLines.length + 1,
      });
    }
    headerLines.push(line);
  }
  const bodyOffset = at;

  const counts = new Map<number, number>();
  const samples: string[] = [];
  while (samples.length < SAMPLE_ROWS) {
    const line = nextLine();
    if (line === null) break;
    if (line.trim() === '') continue;
    samples.push(line);
    // The last piece of an unfinished sample is cut anywhere: only count it when it is the file's only row.
    if (at >= bytes.length && samples.length > 1) break;
    const count = countFields(line, layout.delimiter, layout.quoted);
    counts.set(count, (counts.get(count) ?? 0) + 1);
  }
  if (samples.length === 0) {
    if (!isWhole) return bytes.length < MAX_HEADER_BYTES ? 'more' : tooLongLine(headerLines.length + 1);
    return new RecordError('no-data-rows', {
      message: `${headerLines.length} header lines and no row`,
      userMessage:
        'The file holds a header and no rows of data. It was kept as it is; nothing can be computed from it. Check whether the logger wrote it to the end.',
    });
  }

  const needed = highestField(layout) + 1;
  const byCount = [...counts].sort((a, b) => b[1] - a[1]);
  // The most frequent number of columns that can hold what the layout needs, unless it is a rarity.
  const sampled = byCount.reduce((sum, [, n]) => sum + n, 0);
  const fitting = byCount.find(([fields, n]) => fields >= needed && n >= 0.05 * sampled);
  const fieldCount = (fitting ?? byCount[0])[0];
  const line = headerLines.length + 1;
  if (fieldCount > MAX_FIELDS) return tooManyColumns(line);
  if (fieldCount === 1 && needed > 1) {
    const { delimiter, quoted } = layout;
    const others = (Object.keys(delimiterNames) as DelimiterName[])
      .filter((name) => name !== delimiter)
      .map((name) => ({ name, fields: countFields(samples[0], name, quoted) }))
      // Blanks stand inside stamps too: they come last.
      .sort((a, b) => Number(a.name === 'blanks') - Number(b.name === 'blanks') || b.fields - a.fields);
    const likely = others.find(({ fields }) => fields > 1);
    const hint =
      likely === undefined
        ? ''
        : ` Split at ${delimiterNames[likely.name]}, the first row has ${likely.fields}.`;
    return new RecordError('wrong-delimiter', {
      message: `rows have one field when split at ${delimiterNames[delimiter]}`,
      userMessage: `Split at ${delimiterNames[delimiter]}, as the layout says, every row has only one column.${hint} The file was kept as it is. Correct the delimiter in the layout, then read the file again.`,
      line,
    });
  }
  if (fieldCount < needed) {
    const missing = layout.columns.find((c) => c.index >= fieldCount);
    const what = missing
      ? `column ${missing.index + 1} (${missing.name ?? missing.channel})`
      : `column ${needed}`;
    return new RecordError('wrong-columns', {
      message: `layout needs ${needed} fields, rows have ${fieldCount}`,
      userMessage: `The layout looks for ${what}, but the rows have ${fieldCount} columns. The file was kept as it is. Choose the layout that fits this file, or correct the column numbers.`,
      line,
    });
  }
  const names = layout.nameRow === null ? undefined : headerLines[layout.nameRow];
  const named = names === undefined ? fieldCount : countFields(names, layout.delimiter, layout.quoted);
  // One value too many is a delimiter at the end of each row; more than that, and no value stands below its name.
  if (named > 1 && fieldCount > named + 1)
    return new RecordError('wrong-columns', {
      message: `${named} names, ${fieldCount} fields`,
      userMessage: `The header names ${named} columns, but the rows have ${fieldCount} when split at ${delimiterNames[layout.delimiter]}. Perhaps decimals are written with the same mark. The file was kept as it is. Correct delimiter and decimal mark in the layout.`,
      line,
    });
  return { bodyOffset, newline, headerLines, fieldCount };
}

export function tooLongLine(line: number): RecordError {
  return new RecordError('line-too-long', {
    message: `line ${line} is longer than 1 MiB`,
    userMessage: `Line ${line} is longer than 1 MiB, so this is no table of records, or its line breaks are lost. The file was kept as it is. Check how it was written or transferred.`,
    line,
  });
}

export function tooManyColumns(line: number): RecordError {
  return new RecordError('too-many-columns', {
    message: `line ${line} has more than ${MAX_FIELDS} fields`,
    userMessage: `Line ${line} has more than ${MAX_FIELDS} columns, the most that can be read. The file was kept as it is. Check whether line breaks were lost, or whether the delimiter of the layout is right.`,
    line,
  });
}
