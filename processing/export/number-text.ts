/**
 * Shortest decimal text that reads back as the same double, without an exponent: many readers of tables take "1e-7" for a word.
 *
 * @param value finite number
 * @returns digits, a point where needed, and a hyphen for minus; negative zero is "0"
 */
export function shortestDecimal(value: number): string {
  const text = String(value);
  const at = text.indexOf('e');
  if (at === -1) return text;
  const sign = text.startsWith('-') ? '-' : '';
  const mantissa = text.slice(sign.length, at);
  const exponent = Number(text.slice(at + 1));
  const [whole, fraction = ''] = mantissa.split('.');
  const digits = whole + fraction;
  const point = whole.length + exponent;
  if (point <= 0) return `${sign}0.${'0'.repeat(-point)}${digits}`;
  if (point >= digits.length) return sign + digits + '0'.repeat(point - digits.length);
  return `${sign}${digits.slice(0, point)}.${digits.slice(point)}`;
}
