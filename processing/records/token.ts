/** The slow path for single tokens, and the plain way to split a row; both say what the kernel must agree with. */

const numeral = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
const hexadecimal = /^0[xX][0-9a-fA-F]{1,8}$/;

/** Words that loggers write where there is no value; any case. */
const noValueWords = new Set([
  'nan',
  '-nan',
  '+nan',
  'inf',
  '-inf',
  '+inf',
  'infinity',
  '-infinity',
  '+infinity',
  'na',
  'n/a',
  'null',
  'none',
  '#n/a',
  '-',
  '--',
  '---',
]);

/**
 * A token as a number: exactly Number() of a decimal numeral.
 *
 * @param text the token without quotes and outer blanks
 * @param decimal decimal mark
 * @param isMissing exact tokens that mean "no value"
 * @returns the number; NaN for no value; null when the token is neither
 */
export function readNumber(text: string, decimal: '.' | ',', isMissing: ReadonlySet<string>): number | null {
  if (text === '' || isMissing.has(text)) return NaN;
  const plain = decimal === ',' ? text.replace(',', '.') : text;
  // With a decimal comma, a dot is not a decimal mark as well.
  if (numeral.test(plain) && !(decimal === ',' && text.includes('.'))) return Number(plain);
  if (noValueWords.has(text.toLowerCase())) return NaN;
  return null;
}

/** Status words may be hexadecimal. */
export function readCode(text: string): number | null {
  return hexadecimal.test(text) ? Number(text) : null;
}

/** The missing tokens that are numbers: compared by value, so that -9999 also stands for -9999.00. */
export function numericSentinels(missingTokens: readonly string[], decimal: '.' | ','): number[] {
  const none = new Set<string>();
  const values = missingTokens.map((token) => readNumber(token.trim(), decimal, none));
  return [...new Set(values.filter((value): value is number => value !== null && Number.isFinite(value)))];
}

export type DelimiterName = 'comma' | 'semicolon' | 'tab' | 'blanks' | 'pipe';

export const delimiterBytes: Record<DelimiterName, number> = {
  comma: 44,
  semicolon: 59,
  tab: 9,
  blanks: 32,
  pipe: 124,
};

/** Fields of one line, without line break; quotes removed. For the first look at a file, not for the bulk. */
export function splitRow(line: string, delimiter: DelimiterName, quoted: boolean): string[] {
  const mark = String.fromCharCode(delimiterBytes[delimiter]);
  const text = delimiter === 'blanks' ? line.trim().replace(/[ \t]+/g, ' ') : line;
  if (!quoted || !text.includes('"')) return text.split(mark).map((field) => field.trim());
  const fields: string[] = [];
  let at = 0;
  for (;;) {
    while (text[at] === ' ') at++;
    const quoteEnd = text[at] === '"' ? /"(?:[^"]|"")*"/y : null;
    if (quoteEnd !== null) {
      quoteEnd.lastIndex = at;
      const match = quoteEnd.exec(text);
      if (match !== null) {
        const after = at + match[0].length;
        const rest = text.indexOf(mark, after);
        const between = text.slice(after, rest === -1 ? undefined : rest);
        if (between.trim() === '') {
          fields.push(match[0].slice(1, -1).replace(/""/g, '"'));
          if (rest === -1) return fields;
          at = rest + 1;
          continue;
        }
      }
    }
    const next = text.indexOf(mark, at);
    fields.push(text.slice(at, next === -1 ? undefined : next).trim());
    if (next === -1) return fields;
    at = next + 1;
  }
}
