/**
 * Numbers as people read them: minus is U+2212, groups of three are parted by a narrow no-break space
 * from five digits on, missing is an empty string and never zero. Exports never go through here.
 */

const minus = '\u2212';
const groupGap = '\u202f';

function isMissing(value: number | null | undefined): value is null | undefined {
  return value === null || value === undefined || !Number.isFinite(value);
}

function group(digits: string): string {
  const [whole = '', fraction] = digits.split('.');
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, groupGap) : whole;
  return fraction === undefined ? grouped : `${grouped}.${fraction}`;
}

/** −12.2; '' when missing. Rounds to `decimals`; what rounds to zero carries no minus. */
export function formatNumber(value: number | null | undefined, decimals = 0): string {
  if (isMissing(value)) return '';
  const digits = Math.abs(value).toFixed(decimals);
  const isZero = Number(digits) === 0;
  return `${value < 0 && !isZero ? minus : ''}${group(digits)}`;
}

/** +2.5 or −1.2, for terms that add up. */
export function formatSigned(value: number | null | undefined, decimals = 0): string {
  if (isMissing(value)) return '';
  const text = formatNumber(value, decimals);
  return text.startsWith(minus) || Number(Math.abs(value).toFixed(decimals)) === 0 ? text : `+${text}`;
}

/** ± 1.9; '' when missing. */
export function formatUncertainty(value: number | null | undefined, decimals = 0): string {
  return isMissing(value) ? '' : `± ${formatNumber(Math.abs(value), decimals)}`;
}

/** "−12.2 µmol m-2 s-1": plain text with the unit; wrap in UnitText to raise the exponents. */
export function formatWithUnit(value: number | null | undefined, unit: string, decimals = 0): string {
  if (isMissing(value)) return 'missing';
  return unit === '' ? formatNumber(value, decimals) : `${formatNumber(value, decimals)} ${unit}`;
}

/** A whole number: 17 964. */
export function formatCount(value: number | null | undefined): string {
  return formatNumber(value, 0);
}

/** Share of one as percent: 0.998 → "99.8 %". */
export function formatShare(share: number | null | undefined, decimals = 0): string {
  return isMissing(share) ? '' : `${formatNumber(share * 100, decimals)} %`;
}

const byteUnits = ['bytes', 'kB', 'MB', 'GB', 'TB'] as const;

/** 204 MB; powers of 1000. */
export function formatBytes(bytes: number | null | undefined): string {
  if (isMissing(bytes)) return '';
  let scaled = bytes;
  let unit = 0;
  while (scaled >= 999.5 && unit < byteUnits.length - 1) {
    scaled /= 1000;
    unit += 1;
  }
  return `${formatNumber(scaled, unit === 0 || scaled >= 99.5 ? 0 : 1)} ${byteUnits[unit]}`;
}

/** "3 raw files", "1 raw file". */
export function formatPlural(count: number, one: string, many = `${one}s`): string {
  return `${formatCount(count)} ${count === 1 ? one : many}`;
}

/** A number as it stands in an input: dot, ASCII minus, no groups, all its digits. */
export function formatPlain(value: number | null | undefined): string {
  return isMissing(value) ? '' : String(value);
}

/**
 * What somebody typed as a number: comma or dot, any minus sign, spaces between groups.
 *
 * @returns null when empty, NaN when it is no number
 */
export function parseDecimal(text: string): number | null {
  const bare = text.replace(/[\s\u202f\u00a0]/g, '').replace(/[\u2212\u2013]/g, '-');
  if (bare === '') return null;
  if (!/^[-+]?(\d+([.,]\d*)?|[.,]\d+)([eE][-+]?\d+)?$/.test(bare)) return Number.NaN;
  return Number(bare.replace(',', '.'));
}
