import { describe, expect, it } from 'vitest';
import {
  epochMsOf,
  formatAgo,
  formatClock,
  formatDay,
  formatOffset,
  formatPeriod,
  formatPeriodClock,
  formatSpan,
  parseDay,
  startOfDayMs,
} from '../../../../components/format/times';

const utc = (text: string): number => Date.parse(text);

describe('station time', () => {
  it('is a fixed offset, also where clocks elsewhere change (31 March, 26 October)', () => {
    expect(formatClock(utc('2027-06-17T11:30:00Z'), 60)).toBe('12:30');
    expect(formatClock(utc('2027-03-28T01:30:00Z'), 60)).toBe('02:30');
    expect(formatClock(utc('2027-12-17T11:30:00Z'), 60)).toBe('12:30');
  });

  it('moves the day with the clock', () => {
    // 17 June 2027 is a Thursday (ISO week 24, day 4)
    expect(formatDay(utc('2027-06-16T23:30:00Z'), 60)).toBe('Thu 17 June 2027');
    expect(formatDay(utc('2027-06-17T02:00:00Z'), -180)).toBe('Wed 16 June 2027');
  });

  it('names the offset', () => {
    expect([0, 60, 330, -180].map(formatOffset)).toEqual(['UTC', 'UTC+1', 'UTC+5:30', 'UTC\u22123']);
  });

  it('refuses a time text without zone', () => {
    expect(epochMsOf('2027-06-17T12:30:00')).toBeNaN();
    expect(formatClock('2027-06-17T12:30:00', 60)).toBe('');
  });
});

describe('periods and spans', () => {
  it('write both ends', () => {
    expect(formatPeriod(utc('2027-06-17T11:30:00Z'), utc('2027-06-17T12:00:00Z'), 60)).toBe(
      'Thu 17 June 2027, 12:30\u201313:00',
    );
  });

  it('write the midnight that ends a period as 24:00', () => {
    expect(formatPeriodClock(utc('2027-06-17T22:30:00Z'), utc('2027-06-17T23:00:00Z'), 60)).toBe(
      '23:30\u201324:00',
    );
    expect(formatPeriodClock(utc('2027-06-16T23:00:00Z'), utc('2027-06-16T23:30:00Z'), 60)).toBe(
      '00:00\u201300:30',
    );
  });

  it('count the day before for a span that ends at midnight', () => {
    expect(formatSpan(utc('2027-06-13T23:00:00Z'), utc('2027-06-17T23:00:00Z'), 60)).toBe(
      '14\u201317 June 2027',
    );
    expect(formatSpan(utc('2027-06-16T23:00:00Z'), utc('2027-06-17T23:00:00Z'), 60)).toBe('17 June 2027');
    expect(formatSpan(utc('2027-06-29T00:00:00Z'), utc('2027-07-18T12:00:00Z'), 0)).toBe(
      '29 June\u201318 July 2027',
    );
    expect(formatSpan(utc('2026-12-30T00:00:00Z'), utc('2027-01-02T00:00:00Z'), 0)).toBe(
      '30 December 2026\u20131 January 2027',
    );
  });

  it('say how long ago', () => {
    const now = utc('2027-06-17T12:00:00Z');
    expect(formatAgo(utc('2027-06-17T11:54:00Z'), now)).toBe('6 min ago');
    expect(formatAgo(utc('2027-06-05T12:00:00Z'), now)).toBe('12 days ago');
  });

  it('find the local midnight of an instant and of a written day', () => {
    const midnight = utc('2027-06-16T23:00:00Z');
    expect(startOfDayMs(utc('2027-06-17T11:30:00Z'), 60)).toBe(midnight);
    expect(parseDay('2027-06-17', 60)).toBe(midnight);
    expect(parseDay('17.6.2027', 60)).toBeNaN();
    expect(parseDay('2027-13-01', 0)).toBeNaN();
  });
});
