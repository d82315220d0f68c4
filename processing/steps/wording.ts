import { quantity } from '../catalogue';
import { formatNumber } from './ledger';

/** Numbers as they stand in the sentences of findings: with the unit and decimals people know them by. */

/**
 * A value of the catalogue in its display unit: "−10.82 µmol m-2 s-1".
 *
 * @param key catalogue key
 * @param inner value in the key's inner unit; NaN gives "no value"
 */
export function quantityText(key: string, inner: number): string {
  const { factor, offset, decimals, unit } = quantity(key);
  const shown = formatNumber(inner * factor + offset, decimals);
  return Number.isFinite(inner) ? `${shown} ${unit}` : shown;
}

const smallNumbers = [
  'no',
  'one',
  'two',
  'three',
  'four',
  'five',
  'six',
  'seven',
  'eight',
  'nine',
  'ten',
  'eleven',
  'twelve',
];

/** "six", but "15": counts as they are written in a sentence. */
export function countWord(count: number): string {
  return smallNumbers[count] ?? formatNumber(count);
}

/** "half hour", "hour" or "15 minutes". */
export function periodWord(minutes: number): string {
  if (minutes === 30) return 'half hour';
  if (minutes === 60) return 'hour';
  return `${formatNumber(minutes)} minutes`;
}
