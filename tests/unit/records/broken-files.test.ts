import { mkdtempSync, rmSync, existsSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { RecordErrorCode } from '../../../processing/records/record-error';
import { layoutSchema, type Layout } from '../../../processing/schemas/layout';
import { ingestFile } from '../../../workers/node/ingest-file';
import {
  DAY_START_MS,
  errorOf,
  fileOf,
  header,
  HOUR_MS,
  ingest,
  reportOf,
  rows,
  scanValues,
  smallLayout,
  stamp,
  warningCodes,
  type Ingested,
} from './record-fixtures';

const encoder = new TextEncoder();
const good = fileOf(rows(200));

/** An error must say what happened, what is safe, and what to do. */
function expectError(read: Ingested, code: RecordErrorCode, words: RegExp): void {
  const error = errorOf(read);
  expect(error.code).toBe(code);
  expect(error.userMessage).toMatch(words);
  expect(error.userMessage.length).toBeGreaterThan(60);
  expect(error.userMessage).toMatch(/kept as it is|Nothing was lost|no such file/i);
}

describe('files that cannot be read', () => {
  it('empty', () => expectError(ingest(''), 'empty-file', /is empty/));

  it('a header and nothing else', () => expectError(ingest(header), 'no-data-rows', /no rows of data/));

  it('blank lines only', () => expectError(ingest('\n\r\n\n  \n'), 'no-data-rows', /no (complete row|rows)/));

  it('one row that was cut off', () =>
    expectError(ingest(header + rows(1)[0].slice(0, 30)), 'wrong-columns', /2 columns|columns/));

  it('binary data', () => {
    const bytes = Uint8Array.from({ length: 50_000 }, (_, i) => (i * 7919) % 256);
    expectError(ingest(bytes), 'not-text', /binary/);
  });

  it('NUL bytes from the beginning', () =>
    expectError(ingest(new Uint8Array(10_000)), 'not-text', /not text/));

  it.each([
    ['little-endian', 'utf16le'],
    ['big-endian', 'utf16be'],
  ])('UTF-16 %s', (_, encoding) => {
    const bytes = Buffer.from(`\ufeff${good}`, 'utf16le');
    if (encoding === 'utf16be') bytes.swap16();
    expectError(ingest(bytes), 'not-text', /UTF-16/);
  });

  it('UTF-16 without a mark', () => expectError(ingest(Buffer.from(good, 'utf16le')), 'not-text', /UTF-16/));

  it('gzip data under a text reader', () => expectError(ingest(gzipSync(good)), 'compressed', /gzip/));

  it('a zip archive', () =>
    expectError(
      ingest(Uint8Array.of(0x50, 0x4b, 3, 4, ...new Uint8Array(100))),
      'compressed',
      /zip archive/,
    ));

  it.each([
    ['semicolons where the layout says comma', ';', 'semicolon'],
    ['tabs where the layout says comma', '\t', 'tab'],
  ])('%s', (_, mark, name) => {
    const read = ingest(good.replaceAll(',', mark));
    expectError(read, 'wrong-delimiter', new RegExp(`Split at ${name}, the first row has 7`));
  });

  it('decimal commas split by commas', () => {
    // The layout itself may not say so:
    expect(layoutSchema.safeParse({ ...smallLayout, decimal: ',' }).success).toBe(false);
    // and a file written so has other columns than the layout.
    const read = ingest(fileOf(rows(100).map((row) => row.replaceAll('.', ','))));
    expectError(
      read,
      'wrong-columns',
      /names 7 columns, but the rows have \d+ .*decimals are written with the same mark/,
    );
  });

  it('a column number beyond the rows', () => {
    const layout: Layout = {
      ...smallLayout,
      columns: smallLayout.columns.map((c) => ({ ...c, index: c.index + 8 })),
    };
    expectError(
      ingest(good, layout),
      'wrong-columns',
      /looks for column 10 \(u\), but the rows have 7 columns/,
    );
  });

  it('time and measurement in one column', () => {
    const layout: Layout = { ...smallLayout, columns: [{ ...smallLayout.columns[0], index: 0 }] };
    expectError(ingest(good, layout), 'wrong-columns', /given twice/);
  });

  it('a time column without a time', () => {
    const layout: Layout = {
      ...smallLayout,
      time: { kind: 'stamp', column: 6, format: 'iso' },
      columns: smallLayout.columns.slice(0, 4),
    };
    expectError(ingest(good, layout), 'no-time', /First in line 2/);
  });

  it('letters throughout in place of times', () => {
    expectError(
      ingest(fileOf(rows(100).map((row) => row.replace(/^\S+/, 'yesterday')))),
      'no-time',
      /Date or time/,
    );
  });

  it('stamps at the beginning of 1970', () => {
    expectError(ingest(fileOf(rows(100, 5000))), 'no-time', /1970-01-01, as if it had not been set/);
  });

  it('stamps in the year 2150', () =>
    expectError(ingest(fileOf(rows(100, Date.UTC(2150, 0, 1)))), 'no-time', /2150-01-01/));

  it('another sampling rate, naming both', () => {
    expectError(
      ingest(fileOf(rows(1000, DAY_START_MS, 0, 50))),
      'rate-mismatch',
      /at 20 Hz, but the layout says 10 Hz/,
    );
  });

  it('a rate that is off by six per cent', () => {
    expectError(
      ingest(fileOf(rows(3000, DAY_START_MS, 0, 94))),
      'rate-mismatch',
      /10\.6\d* Hz, but the layout says 10 Hz/,
    );
  });

  it('a million columns', () => {
    const bare: Layout = { ...smallLayout, headerRows: 0, nameRow: null };
    expectError(ingest('1,'.repeat(1_000_000) + '1\n', bare), 'too-many-columns', /more than 4096 columns/);
  });

  it('rows of more than 4096 columns further on', () => {
    const read = ingest(good + '1,'.repeat(5000) + '1\n');
    expectError(read, 'too-many-columns', /Line 202/);
    expect(errorOf(read).line).toBe(202);
  });

  it('a line of 2 GB, given up after little more than 1 MiB', () => {
    const piece = encoder.encode('7'.repeat(1024 * 1024));
    let taken = 0;
    function* line(): Generator<Uint8Array> {
      yield encoder.encode(good);
      for (let i = 0; i < 2048; i++) {
        taken++;
        yield piece;
      }
    }
    expectError(ingest(line()), 'line-too-long', /Line 202 is longer than 1 MiB/);
    expect(taken).toBeLessThanOrEqual(3);
  });

  it('a first line without end', () => {
    const piece = encoder.encode('x'.repeat(1024 * 1024));
    let taken = 0;
    function* line(): Generator<Uint8Array> {
      for (; taken < 2048; taken++) yield piece;
    }
    const read = ingest(line());
    expectError(read, 'header-too-long', /2 MiB/);
    expect(taken).toBeLessThanOrEqual(4);
  });

  it('more bad rows than good ones', () => {
    const lines = rows(100).map((row, i) => (i % 5 < 3 ? row.replace(/,[^,]+$/, '') : row));
    expectError(
      ingest(fileOf(lines)),
      'bad-rows',
      /60 % of the rows cannot be read.*line 2: 6 columns instead of 7/s,
    );
  });
});

describe('files that are read, with what is wrong said', () => {
  it('all values missing', () => {
    const read = ingest(fileOf(rows(100).map((row) => row.replace(/,.*/, ',NAN,NAN,NAN,NAN,NAN,NAN'))));
    expect(warningCodes(read)).toEqual(['all-missing']);
    expect(reportOf(read).warnings[0].message).toContain('u, v, w, ts, signal, code');
    expect(read.chunks[0].columns.present.slice(0, 100).every((p) => p === 1)).toBe(true);
  });

  it('one channel missing', () => {
    const read = ingest(fileOf(rows(100).map((row) => row.replace(/^([^,]+),[^,]+/, '$1,'))));
    expect(reportOf(read).warnings).toEqual([{ code: 'all-missing', message: 'Without a single value: u.' }]);
  });

  it('letters in numbers', () => {
    const lines = rows(100).map((row, i) => (i === 40 ? row.replace(/^([^,]+),[^,]+/, '$1,3.l4') : row));
    const read = ingest(fileOf(lines));
    expect(reportOf(read).warnings[0].message).toBe(
      'Column 2 (u): 1 value that is no number, first "3.l4" in line 42; taken as missing.',
    );
    expect(read.chunks[0].columns.values.windU?.[40]).toBeNaN();
    expect(read.chunks[0].columns.values.windU?.[41]).toBe(Math.fround(0.41));
  });

  it('a few rows with another number of columns', () => {
    const lines = rows(100).map((row, i) => (i === 10 ? row + ',1' : i === 20 ? row.slice(0, 25) : row));
    const report = reportOf(ingest(fileOf(lines)));
    expect(report).toMatchObject({ rows: 98, badRows: 2 });
    expect(report.badRowExamples).toEqual([
      { line: 12, reason: '8 columns instead of 7' },
      { line: 22, reason: expect.stringMatching(/columns? instead of 7/) as string },
    ]);
    expect(report.warnings[0].code).toBe('bad-rows');
  });

  it('a stamp that cannot be read', () => {
    const lines = rows(100).map((row, i) => (i === 10 ? row.replace(/^\S+/, '2027-13-45') : row));
    const report = reportOf(ingest(fileOf(lines)));
    expect(report).toMatchObject({
      rows: 99,
      badRows: 1,
      badRowExamples: [{ line: 12, reason: 'date or time cannot be read' }],
    });
  });

  it('a single stamp of 1970 among good ones', () => {
    const lines = rows(100).map((row, i) => (i === 0 ? `${stamp(0)},${scanValues(0)}` : row));
    const report = reportOf(ingest(fileOf(lines)));
    expect(report.badRowExamples[0].reason).toContain('1970-01-01');
    expect(report.firstScanMs).toBe(DAY_START_MS + 100);
  });

  it('no line break at the end', () => {
    const read = ingest(good.trimEnd());
    expect(reportOf(read)).toMatchObject({ rows: 200, truncatedLastRow: false, warnings: [] });
  });

  it('half a row at the end', () => {
    const report = reportOf(ingest(good + rows(1, DAY_START_MS + 20_000)[0].slice(0, 30)));
    expect(report).toMatchObject({ rows: 200, badRows: 0, truncatedLastRow: true });
    expect(report.warnings.map((w) => w.code)).toEqual(['truncated-last-row']);
  });

  it('NUL bytes where a logger reserved space', () => {
    const bytes = new Uint8Array(good.length + 3_000_000);
    bytes.set(encoder.encode(good));
    const read = ingest(bytes);
    expect(reportOf(read).rows).toBe(200);
    expect(warningCodes(read)).toContain('nul-bytes');
  });

  it('NUL bytes within a row', () => {
    const read = ingest(good + `${stamp(DAY_START_MS + 20_000)},1\0\0,${scanValues(1).slice(2)}\n`);
    expect(warningCodes(read).some((code) => code === 'unreadable-values' || code === 'bad-rows')).toBe(true);
  });

  it('a mark of UTF-8 at the beginning', () => {
    const read = ingest('\ufeff' + good);
    expect(reportOf(read)).toMatchObject({ rows: 200, badRows: 0, warnings: [] });
    const bare: Layout = { ...smallLayout, headerRows: 0, nameRow: null };
    expect(reportOf(ingest('\ufeff' + rows(50).join('\n'), bare)).rows).toBe(50);
  });

  it('carriage returns alone', () =>
    expect(reportOf(ingest(good.replaceAll('\n', '\r')))).toMatchObject({ rows: 200, badRows: 0 }));

  it('a quoted line break', () => {
    const read = ingest(
      `"time","a\nb",v,w,ts,signal,code\n`.replace('\n', ' ') +
        rows(20)
          .map((r, i) => (i === 5 ? r.replace(/^([^,]+),([^,]+)/, '$1,"$2\n"') : r))
          .join('\n'),
    );
    expect(reportOf(read).rows).toBe(20);
  });

  it('a quote that is never closed', () => {
    const lines = rows(200).map((row, i) => (i === 50 ? `"${row}` : row));
    expect(reportOf(ingest(fileOf(lines)))).toMatchObject({ rows: 199, badRows: 1 });
  });

  it('stamps given twice', () => {
    const read = ingest(fileOf(rows(100).flatMap((row) => [row, row])));
    expect(reportOf(read).warnings.map((w) => w.code)).toContain('duplicates');
    expect(read.chunks[0].intake).toMatchObject({ duplicates: 100, length: 100 });
  });

  it('time running backwards throughout', () => {
    const read = ingest(fileOf(rows(200).reverse()));
    expect(warningCodes(read)).toContain('time-reversed');
    expect(read.chunks[0].intake).toMatchObject({ backwardSteps: 199, length: 200 });
    expect(read.chunks[0].columns.values.windU?.[3]).toBe(Math.fround(0.03));
  });

  it('the clock set back by an hour, as at the end of daylight saving', () => {
    const read = ingest(fileOf([...rows(40_000), ...rows(20_000, DAY_START_MS + 4_000_000 - HOUR_MS, 5)]));
    const report = reportOf(read);
    expect(report.chunks.reduce((sum, c) => sum + c.backwardSteps, 0)).toBe(1);
    expect(warningCodes(read)).toEqual(['time-reversed', 'duplicates']);
    // What was written first stays.
    expect(read.chunks[0].columns.values.windU?.[4500]).toBe(Math.fround(5));
  });

  it('the clock set forward by an hour, as at the beginning of daylight saving', () => {
    const read = ingest(fileOf([...rows(1000), ...rows(1000, DAY_START_MS + 100_000 + HOUR_MS, 1000)]));
    expect(warningCodes(read)).toEqual(['clock-jumps']);
    expect(read.chunks.map((c) => c.intake.largestJumpS)).toEqual([0, 3600]);
  });

  it('a gap over midnight', () => {
    const before = DAY_START_MS + 24 * HOUR_MS - 60_000;
    const read = ingest(fileOf([...rows(300, before), ...rows(300, before + 120_000, 300)]));
    expect(read.chunks.map((c) => [c.intake.startMs - DAY_START_MS, c.intake.length])).toEqual([
      [23.5 * HOUR_MS, 300],
      [24 * HOUR_MS, 300],
    ]);
    expect(warningCodes(read)).toEqual(['clock-jumps']);
  });

  it('a rate that changes in mid-file', () => {
    const read = ingest(fileOf([...rows(30_000), ...rows(12_000, DAY_START_MS + 3_000_000, 0, 200)]));
    expect(warningCodes(read)).toContain('rate-change');
    expect(reportOf(read).warnings.find((w) => w.code === 'rate-change')?.message).toMatch(
      /at 5 Hz instead of 10 Hz/,
    );
  });

  it('a clock that drifts by half a per cent', () => {
    const read = ingest(fileOf(rows(2000, DAY_START_MS, 0, 100.5)));
    expect(warningCodes(read)).toContain('rate-drift');
  });

  it('stamps in the future, where the time is known', () => {
    const read = ingest(good, smallLayout, { latestPlausibleMs: DAY_START_MS - 1 });
    expect(warningCodes(read)).toEqual(['future-stamps']);
  });

  it('a unit that contradicts the header', () => {
    const layout: Layout = { ...smallLayout, headerRows: 2, unitRow: 1 };
    const read = ingest(`${header},m/s,m/s,m/s,K,%,\n${rows(20).join('\n')}\n`, layout);
    expect(reportOf(read).warnings).toContainEqual({
      code: 'unit-differs',
      message: 'Column 5 (ts) is in K by its header, in degC by the layout.',
    });
  });

  it('a unit that the values contradict', () => {
    const layout: Layout = {
      ...smallLayout,
      columns: smallLayout.columns.map((c) => (c.channel === 'sonicTemperature' ? { ...c, unit: 'K' } : c)),
    };
    expect(reportOf(ingest(good, layout)).warnings).toContainEqual({
      code: 'unit-doubtful',
      message: 'ts: a typical value of 17 is hardly K; check unit and column.',
    });
  });

  it('columns that were renamed', () => {
    const read = ingest(good.replace('time,u,v', 'time,v,u'));
    expect(warningCodes(read)).toEqual(['name-differs', 'name-differs']);
  });

  it('every third row lost', () => {
    const read = ingest(fileOf(rows(3000).filter((_, i) => i % 3 !== 0)));
    expect(reportOf(read)).toMatchObject({ rows: 2000, warnings: [] });
    expect(reportOf(read).fittedRateHz).toBeCloseTo(10, 9);
  });

  it('one header line more than the layout says', () => {
    expect(
      reportOf(ingest('made by a logger\n' + good, { ...smallLayout, headerRows: 1, nameRow: null })),
    ).toMatchObject({ rows: 200, badRows: 1 });
  });
});

describe('packed files', () => {
  let folder = '';
  beforeAll(() => {
    folder = mkdtempSync(join(tmpdir(), 'gustbook-broken-'));
  });
  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  async function read(name: string, bytes: Uint8Array | string) {
    const path = join(folder, name);
    writeFileSync(path, bytes);
    const outFolder = join(folder, `${name}.chunks`);
    const result = await ingestFile({
      path,
      fileName: name,
      layout: smallLayout,
      utcOffsetMinutes: 0,
      outFolder,
    });
    return { result, outFolder };
  }

  it('are read like plain ones, and known by what is inside', async () => {
    const plain = await read('a.csv', good);
    const packed = await read('a.csv.gz', gzipSync(good));
    expect('report' in plain.result).toBe(true);
    expect(packed.result).toEqual(plain.result);
    expect(existsSync(join(packed.outFolder, 'index.json'))).toBe(true);
  });

  it('are told by their first bytes, not by their name', async () => {
    expect('report' in (await read('b.csv', gzipSync(good))).result).toBe(true);
    expect('report' in (await read('c.gz', good)).result).toBe(true);
  });

  it('of several members are read to the end', async () => {
    const lines = good.trimEnd().split('\n');
    const half = gzipSync(lines.slice(0, 100).join('\n') + '\n');
    const rest = gzipSync(lines.slice(100).join('\n') + '\n');
    expect((await read('d.gz', Buffer.concat([half, rest]))).result).toMatchObject({
      report: { rows: 200, badRows: 0 },
    });
  });

  it('that end too early are an error, and leave no chunks', async () => {
    const whole = gzipSync(fileOf(rows(20_000)));
    const { result, outFolder } = await read('e.gz', whole.subarray(0, Math.floor(whole.length / 2)));
    expect(result).toMatchObject({
      problem: { code: 'truncated-gzip', userMessage: expect.stringContaining('ends too early') as string },
    });
    expect(existsSync(outFolder)).toBe(false);
  });

  it('that are damaged are an error', async () => {
    const whole = gzipSync(fileOf(rows(20_000)));
    for (let i = 0; i < 400; i++) whole[Math.floor(whole.length / 2) + i] ^= 0x5a;
    expect((await read('f.gz', whole)).result).toMatchObject({ problem: { code: 'damaged-gzip' } });
  });

  it('that are only the name of one', async () => {
    expect((await read('g.gz', Uint8Array.of(0x1f, 0x8b))).result).toMatchObject({
      problem: { code: expect.stringMatching(/gzip/) as string },
    });
  });

  it('that grow without end are given up', async () => {
    // 400 MB of one blank row, packed to some 400 kB: more than records ever shrink.
    const member = gzipSync('\n'.repeat(100_000_000), { level: 9 });
    const bomb = Buffer.concat([gzipSync(good), member, member, member, member]);
    const { result, outFolder } = await read('h.gz', bomb);
    expect(result).toMatchObject({ problem: { code: 'expands-too-far' } });
    expect(existsSync(outFolder)).toBe(false);
  });

  it('a path that is not there, and one that is a folder', async () => {
    const request = {
      fileName: 'x',
      layout: smallLayout,
      utcOffsetMinutes: 0,
      outFolder: join(folder, 'x.chunks'),
    };
    expect(await ingestFile({ ...request, path: join(folder, 'missing.csv') })).toMatchObject({
      problem: { code: 'unreadable-file' },
    });
    expect(await ingestFile({ ...request, path: folder })).toMatchObject({
      problem: { code: 'unreadable-file' },
    });
  });

  it('a file that has grown is known to begin with the older one', async () => {
    const older = await read('short.csv', good);
    if (!('report' in older.result)) throw new Error('unreadable');
    const { contentHash, contentBytes } = older.result.report;
    const path = join(folder, 'grown.csv');
    writeFileSync(path, good + rows(50, DAY_START_MS + 20_000).join('\n') + '\n');
    const request = {
      path,
      fileName: 'grown.csv',
      layout: smallLayout,
      utcOffsetMinutes: 0,
      outFolder: join(folder, 'grown'),
    };
    const other = { contentHash: 'f'.repeat(64), bytes: 100 };
    const grown = await ingestFile({ ...request, olderFiles: [{ contentHash, bytes: contentBytes }, other] });
    expect(grown).toMatchObject({ report: { beginsWith: [contentHash], rows: 250 } });
  });

  it('stops when asked to and leaves nothing behind', async () => {
    const path = join(folder, 'long.csv');
    writeFileSync(path, fileOf(rows(40_000)));
    const outFolder = join(folder, 'long.chunks');
    let asked = 0;
    const result = await ingestFile(
      { path, fileName: 'long.csv', layout: smallLayout, utcOffsetMinutes: 0, outFolder },
      { isCancelled: () => ++asked > 3 },
    );
    expect(result).toEqual({ cancelled: true });
    expect(existsSync(outFolder)).toBe(false);
  });
});
