import type { ChunkColumns, ChunkIntake, IngestReport } from '../../../processing/chunks/chunk';
import { Ingest, type IngestOptions } from '../../../processing/records/ingest';
import { RecordError } from '../../../processing/records/record-error';
import type { Layout } from '../../../processing/schemas/layout';

/** Small invented records for tests: five channels and a status at 10 Hz. */

export const HOUR_MS = 3_600_000;
export const DAY_START_MS = Date.UTC(2027, 4, 3);

export const smallLayout: Layout = {
  schema: 'gustbook/layout/1',
  name: 'Small test records',
  delimiter: 'comma',
  decimal: '.',
  quoted: true,
  headerRows: 1,
  nameRow: 0,
  unitRow: null,
  missingTokens: ['NAN', '-9999'],
  sampleRateHz: 10,
  clock: { kind: 'utc' },
  stampMarks: 'start',
  time: { kind: 'stamp', column: 0, format: 'iso' },
  columns: [
    { channel: 'windU', index: 1, name: 'u', unit: 'm s-1', knownBy: 'name' },
    { channel: 'windV', index: 2, name: 'v', unit: 'm s-1', knownBy: 'name' },
    { channel: 'windW', index: 3, name: 'w', unit: 'm s-1', knownBy: 'name' },
    { channel: 'sonicTemperature', index: 4, name: 'ts', unit: 'degC', knownBy: 'name' },
    { channel: 'signalStrength', index: 5, name: 'signal', unit: '%', knownBy: 'name' },
    {
      channel: 'sonicStatus',
      index: 6,
      name: 'code',
      unit: 'code',
      knownBy: 'name',
      good: { codes: [0], mask: null, equals: null },
    },
  ],
};

export const header = 'time,u,v,w,ts,signal,code\n';

export function stamp(ms: number): string {
  return new Date(ms).toISOString().replace('T', ' ').replace('Z', '');
}

/** The values of scan i, so that tests can tell which scan sits where. */
export function scanValues(i: number): string {
  return `${(i % 1000) / 100},${-(i % 7)},0.0${i % 10},${15 + (i % 5)},${90 + (i % 3)},0`;
}

/** Rows first … first + n − 1, stamps from `startMs` on. */
export function rows(n: number, startMs = DAY_START_MS, first = 0, stepMs = 100): string[] {
  return Array.from({ length: n }, (_, k) => `${stamp(startMs + k * stepMs)},${scanValues(first + k)}`);
}

export function fileOf(lines: string[]): string {
  return header + lines.join('\n') + '\n';
}

export interface Ingested {
  chunks: { columns: ChunkColumns; intake: ChunkIntake }[];
  result: IngestReport | RecordError;
}

function copied(columns: ChunkColumns): ChunkColumns {
  const copy: ChunkColumns = { ...columns, present: columns.present.slice(), values: {}, status: {} };
  for (const [key, values] of Object.entries(columns.values))
    copy.values[key as keyof ChunkColumns['values']] = values.slice();
  for (const [key, codes] of Object.entries(columns.status))
    copy.status[key as keyof ChunkColumns['status']] = codes.slice();
  return copy;
}

/** Reads bytes (or pieces of them) with a layout. */
export function ingest(
  content: string | Uint8Array | Iterable<Uint8Array>,
  layout: Layout = smallLayout,
  options: Partial<IngestOptions> = {},
): Ingested {
  const chunks: Ingested['chunks'] = [];
  const reader = new Ingest({
    layout,
    fileName: 'hollin-20270503.csv',
    utcOffsetMinutes: 0,
    onChunk: (columns, intake) => chunks.push({ columns: copied(columns), intake }),
    ...options,
  });
  const pieces =
    typeof content === 'string'
      ? [new TextEncoder().encode(content)]
      : content instanceof Uint8Array
        ? [content]
        : content;
  for (const piece of pieces) if (reader.push(piece) !== null) break;
  return { chunks, result: reader.finish('0'.repeat(64)) };
}

export function reportOf(ingested: Ingested): IngestReport {
  if (ingested.result instanceof RecordError)
    throw new Error(`${ingested.result.code}: ${ingested.result.userMessage}`);
  return ingested.result;
}

export function errorOf(ingested: Ingested): RecordError {
  if (!(ingested.result instanceof RecordError)) throw new Error('read without an error');
  return ingested.result;
}

export function warningCodes(ingested: Ingested): string[] {
  return reportOf(ingested).warnings.map((w) => w.code);
}
