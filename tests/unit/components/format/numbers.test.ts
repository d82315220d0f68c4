import { describe, expect, it } from 'vitest';
import {
  formatBytes,
  formatCount,
  formatNumber,
  formatPlain,
  formatShare,
  formatSigned,
  formatUncertainty,
  parseDecimal,
} from '../../../../components/format/numbers';

describe('formatNumber', () => {
  it('writes the true minus sign and the decimals asked for', () => {
    expect(formatNumber(-12.24, 1)).toBe('\u221212.2');
    expect(formatNumber(281, 0)).toBe('281');
  });

  it('writes nothing, not zero, for what is missing', () => {
    for (const missing of [null, undefined, Number.NaN, Infinity]) expect(formatNumber(missing, 1)).toBe('');
  });

  it('drops the minus of what rounds to zero', () => {
    expect(formatNumber(-0.04, 1)).toBe('0.0');
    expect(formatNumber(-0.05, 2)).toBe('\u22120.05');
  });

  it('parts groups of three from five digits on', () => {
    expect(formatCount(17964)).toBe('17\u202f964');
    expect(formatCount(1728000)).toBe('1\u202f728\u202f000');
    expect(formatCount(9999)).toBe('9999');
    expect(formatNumber(12345.678, 2)).toBe('12\u202f345.68');
  });
});

describe('the other written forms', () => {
  it('sign terms that add up', () => {
    expect([2.5, -1.2, 0].map((value) => formatSigned(value, 1))).toEqual(['+2.5', '\u22121.2', '0.0']);
  });

  it('write uncertainty as plus-minus', () => {
    expect(formatUncertainty(1.94, 1)).toBe('± 1.9');
    expect(formatUncertainty(null, 1)).toBe('');
  });

  it('write shares as percent and bytes in powers of a thousand', () => {
    expect(formatShare(0.998, 1)).toBe('99.8 %');
    expect(formatBytes(204_400_000)).toBe('204 MB');
    expect(formatBytes(1_500)).toBe('1.5 kB');
    expect(formatBytes(999_900)).toBe('1.0 MB');
    expect(formatBytes(12)).toBe('12 bytes');
  });
});

describe('parseDecimal', () => {
  it.each([
    ['3.2', 3.2],
    ['3,2', 3.2],
    ['\u22122,5', -2.5],
    ['-2.5', -2.5],
    ['17\u202f964', 17964],
    ['1 234,5', 1234.5],
    ['.5', 0.5],
    ['3.', 3],
    ['1e-3', 0.001],
  ])('reads %s', (text, value) => {
    expect(parseDecimal(text)).toBe(value);
  });

  it('tells empty from wrong', () => {
    expect(parseDecimal('  ')).toBeNull();
    for (const wrong of ['three', '1,2,3', '1.2.3', '-', '3 m', '0x10'])
      expect(parseDecimal(wrong)).toBeNaN();
  });

  it('reads back what formatPlain writes', () => {
    for (const value of [0, -2.5, 1e-7, 123456.789]) expect(parseDecimal(formatPlain(value))).toBe(value);
  });
});
