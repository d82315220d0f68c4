/** The slow path for single tokens: it says what the kernel must agree with. */

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
