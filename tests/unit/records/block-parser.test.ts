import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BlockParser, type BlockParserOptions } from '../../../processing/records/block-parser';
import { FIRST_NUMBER_COLUMN, TIME_COLUMN } from '../../../processing/records/kernel';
import { readClock } from '../../../processing/records/time-pattern';

const encoder = new TextEncoder();

interface Parsed {
  columns: number[][];
  lines: number[];
  parser: BlockParser;
}

/** Parses text cut into pieces of the given sizes (the last size repeats). */
function parse(
  text: string,
  overrides: Partial<BlockParserOptions>,
  pieceSizes: number[] = [1 << 20],
): Parsed {
  const columns: number[][] = [];
  const lines: number[] = [];
  const numberFields = overrides.numberFields ?? [0];
  const parser = new BlockParser({
    delimiter: 'comma',
    decimal: '.',
    quoted: false,
    newline: 10,
    fieldCount: numberFields.length,
    numberFields,
    measuredFields: new Set(numberFields),
    codeFields: new Set(),
    dateField: null,
    timeField: null,
    missingTokens: [],
    headerLines: 0,
    resolveTime: () => NaN,
    onBlock: (block) => {
      block.columns.forEach((column, c) => (columns[c] ??= []).push(...column.subarray(0, block.rows)));
      lines.push(...block.lines.subarray(0, block.rows));
      return null;
    },
    ...overrides,
  });
  const bytes = encoder.encode(text);
  for (let at = 0, i = 0; at < bytes.length; i++) {
    const size = Math.max(1, pieceSizes[Math.min(i, pieceSizes.length - 1)]);
    parser.push(bytes.subarray(at, at + size));
    at += size;
  }
  parser.finish();
  return { columns, lines, parser };
}

const numbersOf = (parsed: Parsed, n = 0): number[] => parsed.columns[FIRST_NUMBER_COLUMN + n] ?? [];

/** Decimal numerals of every shape: fixed decimals, many digits, exponents, signs, marks at either end. */
const numeral = fc.oneof(
  {
    weight: 4,
    arbitrary: fc
      .tuple(fc.integer({ min: -99_999_999, max: 99_999_999 }), fc.nat(8))
      .map(([n, d]) => (n / 10 ** d).toFixed(d)),
  },
  { weight: 3, arbitrary: fc.stringMatching(/^-?[0-9]{1,17}(\.[0-9]{0,12})?$/) },
  { weight: 2, arbitrary: fc.stringMatching(/^[+-]?[0-9]{0,4}\.[0-9]{1,20}$/) },
  { weight: 2, arbitrary: fc.stringMatching(/^[+-]?[0-9]{1,19}(\.[0-9]{1,6})?[eE][+-]?[0-9]{1,3}$/) },
  { weight: 2, arbitrary: fc.double({ noNaN: true, noDefaultInfinity: true }).map(String) },
  {
    weight: 1,
    arbitrary: fc.constantFrom(
      '0',
      '-0',
      '-0.000',
      '.5',
      '-.5',
      '5.',
      '9007199254740993',
      '9007199254740991',
      '0.1',
      '1e22',
      '1e23',
      '1e-22',
      '123456789012345678901234567890',
    ),
  },
);

describe('block parser', () => {
  it('reads every decimal numeral to the bit as Number() does', () => {
    fc.assert(
      fc.property(
        fc.array(numeral, { minLength: 1, maxLength: 60 }),
        fc.integer({ min: 1, max: 90 }),
        (tokens, piece) => {
          const read = numbersOf(
            parse(tokens.map((t) => `${t},1`).join('\n') + '\n', { numberFields: [0], fieldCount: 2 }, [
              piece,
            ]),
          );
          expect(read).toHaveLength(tokens.length);
          tokens.forEach((token, i) =>
            expect(Object.is(read[i], Number(token)) ? token : `${token} → ${read[i]}`).toBe(token),
          );
        },
      ),
      { numRuns: 1500, seed: 20240501 },
    );
  });

  it('reads numerals alike whatever number of decimals the column had before', () => {
    // Columns whose number of decimals changes in every way, so that both the paired and the single path are taken.
    fc.assert(
      fc.property(
        fc.array(fc.tuple(fc.nat(8), fc.integer({ min: 1, max: 40 })), { minLength: 1, maxLength: 12 }),
        fc.integer({ min: -99_999, max: 99_999 }),
        (runs, start) => {
          const tokens: string[] = [];
          let n = start;
          for (const [decimals, count] of runs)
            for (let i = 0; i < count; i++)
              tokens.push(((n = (n * 7919 + 13) % 1_000_003) / 1000).toFixed(decimals));
          expect(numbersOf(parse(tokens.join('\n'), {}))).toEqual(tokens.map(Number));
        },
      ),
      { numRuns: 300, seed: 7 },
    );
  });

  it('does not depend on how the bytes are cut into pieces', () => {
    const text = Array.from(
      { length: 300 },
      (_, i) => `"${i},${i}",${(i * 0.37).toFixed(3)}, ${-i} ,"${i}.5"`,
    ).join('\r\n');
    const options = { quoted: true, fieldCount: 4, numberFields: [1, 2, 3] };
    const whole = parse(text, options);
    expect(numbersOf(whole, 2)[299]).toBe(299.5);
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 1, max: 200 }), { minLength: 1, maxLength: 20 }), (sizes) => {
        const cut = parse(text, options, sizes);
        expect(cut.columns).toEqual(whole.columns);
        expect(cut.lines).toEqual(whole.lines);
      }),
      { numRuns: 60, seed: 3 },
    );
  });

  it.each([
    ['semicolon', ';'],
    ['tab', '\t'],
    ['pipe', '|'],
  ] as const)('splits at %s with decimal comma', (delimiter, mark) => {
    const parsed = parse(`1,5${mark}-2,25\n3${mark}1,0e1\n`, {
      delimiter,
      decimal: ',',
      numberFields: [0, 1],
    });
    expect(numbersOf(parsed, 0)).toEqual([1.5, 3]);
    expect(numbersOf(parsed, 1)).toEqual([-2.25, 10]);
  });

  it('takes a run of blanks and tabs for one delimiter, also before and behind a row', () => {
    const parsed = parse('  1.5   -2\t 3  \r\n\n4 5 6\n   \n', {
      delimiter: 'blanks',
      numberFields: [0, 1, 2],
    });
    expect(numbersOf(parsed, 0)).toEqual([1.5, 4]);
    expect(numbersOf(parsed, 2)).toEqual([3, 6]);
    expect(parsed.lines).toEqual([1, 3]);
    expect(parsed.parser.badRows).toBe(0);
  });

  it.each([
    ['line feeds', '1,2\n3,4\n5,6', 10],
    ['carriage return and line feed', '1,2\r\n3,4\r\n5,6\r\n', 10],
    ['carriage returns alone', '1,2\r3,4\r5,6\r', 13],
    ['a stray second carriage return', '1,2\r\r\n3,4\r\r\n5,6\r\r\n', 10],
  ] as const)('reads rows that end in %s', (_, text, newline) => {
    const parsed = parse(text, { newline, numberFields: [0, 1] });
    expect(numbersOf(parsed, 1)).toEqual([2, 4, 6]);
    expect(parsed.parser.badRows).toBe(0);
  });

  it('keeps what stands between quotes together, also line breaks and doubled quotes', () => {
    const text = '"a,b",1\n"two\nlines",2\n"say ""no""",3\n"",4\nplain,"5"\n';
    const parsed = parse(text, { quoted: true, fieldCount: 2, numberFields: [1] });
    expect(numbersOf(parsed)).toEqual([1, 2, 3, 4, 5]);
    expect(parsed.lines).toEqual([1, 2, 4, 5, 6]);
  });

  it('loses one row, not the rest, to a quote that is never closed', () => {
    const rows = Array.from({ length: 400 }, (_, i) => (i === 100 ? `"odd,${i},0` : `"x",${i}`));
    const parsed = parse(rows.join('\n'), { quoted: true, fieldCount: 2, numberFields: [1] });
    expect(numbersOf(parsed)).toHaveLength(399);
    expect(parsed.parser.badRows).toBe(1);
    expect(parsed.parser.badRowExamples[0]).toEqual({ line: 101, reason: '3 columns instead of 2' });
  });

  it('gives NaN for missing tokens, by text or by value, and for words that mean no value', () => {
    const parsed = parse('1\n-9999\n-9999.00\nNAN\nnan\n"NAN"\nMISS\n\nINF\n-INF\n7\n', {
      quoted: true,
      missingTokens: ['-9999', 'MISS'],
    });
    expect(numbersOf(parsed)).toEqual([1, NaN, NaN, NaN, NaN, NaN, NaN, NaN, NaN, 7]);
    expect(parsed.parser.unreadable.size).toBe(0);
  });

  it('gives NaN for letters and counts them with the first place', () => {
    const parsed = parse('1,2\n3,x4\n5,1.2.3\n7,--8\n9,0x10\n', { numberFields: [0, 1] });
    expect(numbersOf(parsed, 1)).toEqual([2, NaN, NaN, NaN, NaN]);
    expect(parsed.parser.unreadable.get(1)).toEqual({ count: 4, line: 2, text: 'x4' });
  });

  it('reads hexadecimal codes in status columns only', () => {
    const parsed = parse('0x1F,0x1F\n', { numberFields: [0, 1], codeFields: new Set([1]) });
    expect(numbersOf(parsed, 0)).toEqual([NaN]);
    expect(numbersOf(parsed, 1)).toEqual([31]);
  });

  it('sets rows with another number of fields aside, with line and reason', () => {
    const parsed = parse('1,2\n3\n4,5,6\n7,8\n', { numberFields: [0, 1] });
    expect(numbersOf(parsed, 0)).toEqual([1, 7]);
    expect(parsed.parser.badRows).toBe(2);
    expect(parsed.parser.badRowExamples).toEqual([
      { line: 2, reason: '1 column instead of 2' },
      { line: 3, reason: '3 columns instead of 2' },
    ]);
  });

  it('tells a last row that was cut off from bad rows', () => {
    const parsed = parse('1,2\n3,4\n5', { numberFields: [0, 1] });
    expect(numbersOf(parsed, 0)).toEqual([1, 3]);
    expect(parsed.parser.truncatedLastRow).toBe(true);
    expect(parsed.parser.badRows).toBe(0);
    expect(parsed.parser.badRowExamples).toEqual([]);
  });

  it('hands rows over in blocks and leaves none out', () => {
    const sizes: number[] = [];
    const text = Array.from({ length: 2500 }, (_, i) => `${i}`).join('\n');
    let next = 0;
    parse(text, {
      rowsPerBlock: 1000,
      onBlock: (block) => {
        sizes.push(block.rows);
        for (let i = 0; i < block.rows; i++) expect(block.columns[FIRST_NUMBER_COLUMN][i]).toBe(next++);
        return null;
      },
    });
    expect(sizes).toEqual([1000, 1000, 500]);
  });

  it('asks for a stamp once while only its seconds change', () => {
    const texts: string[] = [];
    const rows = Array.from(
      { length: 600 },
      (_, i) => `10:${String(Math.floor(i / 200)).padStart(2, '0')}:${((i % 200) * 0.3).toFixed(1)},1`,
    );
    const parsed = parse(rows.join('\n'), {
      fieldCount: 2,
      numberFields: [1],
      timeField: 0,
      resolveTime: (_, text, kernel) => {
        texts.push(text);
        const reading = readClock(text);
        if (reading === null) return NaN;
        kernel.rememberPrefix(reading.secondsAt, reading.baseMs, 46);
        return reading.ms;
      },
    });
    expect(texts).toEqual(['10:00:0.0', '10:01:0.0', '10:02:0.0']);
    const times = parsed.columns[TIME_COLUMN];
    rows.forEach((_, i) =>
      expect(times[i]).toBeCloseTo((600 + Math.floor(i / 200)) * 60_000 + (i % 200) * 300, 6),
    );
  });

  it('stops at a line longer than 1 MiB without holding more of it', () => {
    const parsed = parse('', {});
    const piece = encoder.encode('1'.repeat(64 * 1024));
    let error = null;
    let pushed = 0;
    while (error === null && pushed < 100) {
      error = parsed.parser.push(piece);
      pushed++;
    }
    expect(error).toMatchObject({ code: 'line-too-long', line: 1 });
    expect(pushed).toBe(17);
  });

  it('stops at a row of more than 4096 columns', () => {
    const { parser } = parse('', {});
    expect(parser.push(encoder.encode('1\n' + '1,'.repeat(5000) + '1\n'))).toMatchObject({
      code: 'too-many-columns',
      line: 2,
    });
  });

  it('skips long runs of NUL bytes and reads on behind them', () => {
    const read: number[] = [];
    const { parser } = parse('', {
      onBlock: (block) => {
        read.push(...block.columns[FIRST_NUMBER_COLUMN].subarray(0, block.rows));
        return null;
      },
    });
    expect(parser.push(encoder.encode('1\n'))).toBeNull();
    expect(parser.push(new Uint8Array(3 * 1024 * 1024))).toBeNull();
    expect(parser.push(encoder.encode('\n2\n'))).toBeNull();
    expect(parser.finish()).toBeNull();
    expect(parser.skippedNulBytes).toBeGreaterThan(2 * 1024 * 1024);
    // What was left of the run is one unreadable row.
    expect(read).toEqual([1, NaN, 2]);
  });
});
