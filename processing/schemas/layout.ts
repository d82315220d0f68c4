import { z } from 'zod';

/** How a system's raw files are laid out. */

/** What a raw column can hold. One entry per recorded series; a further gas is one more entry here and in the catalogue. */
export const channelKeys = [
  'windU',
  'windV',
  'windW',
  'sonicTemperature',
  'co2',
  'h2o',
  'airTemperature',
  'airPressure',
  'sonicStatus',
  'analyserStatus',
  'signalStrength',
] as const;
export type ChannelKey = (typeof channelKeys)[number];

/** Channels kept as whole numbers. */
export const statusChannels: readonly ChannelKey[] = ['sonicStatus', 'analyserStatus'];

/** Units a column may be written in, by channel; the first is the one used inside. `toInner` is linear: inner = a·x + b. */
export const channelUnits = {
  windU: ['m s-1', 'cm s-1', 'km h-1'],
  windV: ['m s-1', 'cm s-1', 'km h-1'],
  windW: ['m s-1', 'cm s-1', 'km h-1'],
  sonicTemperature: ['K', 'degC', 'm s-1'],
  co2: ['mmol m-3', 'mg m-3', 'umol m-3', 'umol mol-1', 'umol mol-1 dry'],
  h2o: ['mmol m-3', 'g m-3', 'mol m-3', 'mmol mol-1', 'mmol mol-1 dry'],
  airTemperature: ['K', 'degC'],
  airPressure: ['Pa', 'hPa', 'kPa'],
  sonicStatus: ['code'],
  analyserStatus: ['code'],
  signalStrength: ['%', '1'],
} as const satisfies Record<ChannelKey, readonly string[]>;

export const columnSchema = z.object({
  channel: z.enum(channelKeys),
  /** Zero-based position in the row. */
  index: z.number().int().min(0).max(4095),
  /** Name in the header, when it has one. */
  name: z.string().max(120).nullable(),
  unit: z.string().max(24),
  /** How we know what the column holds. */
  knownBy: z.enum(['name', 'unit-row', 'range', 'position', 'person']),
  /** Status columns: which codes mean good. A code is good if it is listed, or (code & mask) === equals. */
  good: z
    .object({
      codes: z.array(z.number().int()).max(64),
      mask: z.number().int().nullable(),
      equals: z.number().int().nullable(),
    })
    .optional(),
  /** Signal strength: does a higher number mean a cleaner window? */
  higherIsBetter: z.boolean().optional(),
});
export type LayoutColumn = z.infer<typeof columnSchema>;

/**
 * Date parts in a pattern: YYYY YY MM DD DDD (day of year) hh mm ss, everything else literal; `*` stands for any run of characters.
 */
const pattern = z.string().min(2).max(120);

const partSource = z.discriminatedUnion('from', [
  z.object({ from: z.literal('file-name'), pattern }),
  z.object({ from: z.literal('header'), pattern }),
]);

export const timeSourceSchema = z.discriminatedUnion('kind', [
  /** One column with date and time: ISO 8601 (T or blank), or a pattern. */
  z.object({
    kind: z.literal('stamp'),
    column: z.number().int().min(0),
    format: z.union([z.literal('iso'), pattern]),
  }),
  /** A date column and a time-of-day column. */
  z.object({
    kind: z.literal('date-and-time'),
    dateColumn: z.number().int().min(0),
    dateFormat: z.union([z.literal('iso'), pattern]),
    timeColumn: z.number().int().min(0),
  }),
  /** Year (a column, or from name or header), day of year, and time: hh:mm:ss, hhmm, or fraction in the day itself. */
  z.object({
    kind: z.literal('day-of-year'),
    year: z.union([z.object({ column: z.number().int().min(0) }), partSource]),
    dayColumn: z.number().int().min(0),
    timeColumn: z.number().int().min(0).nullable(),
    /** `hhmm`: 5 means 00:05, with seconds in their own column. */
    timeFormat: z.enum(['clock', 'hhmm', 'fraction-of-day', 'seconds-of-day']),
    secondsColumn: z.number().int().min(0).nullable(),
  }),
  z.object({ kind: z.literal('epoch'), column: z.number().int().min(0), unit: z.enum(['s', 'ms', 'us']) }),
  /** Time of day in a column, date from name or header; midnight roll-overs count on. */
  z.object({ kind: z.literal('time-of-day'), column: z.number().int().min(0), date: partSource }),
  /** No stamps: start from name or header, then the sampling rate. */
  z.object({ kind: z.literal('start-and-rate'), start: partSource }),
]);
export type TimeSource = z.infer<typeof timeSourceSchema>;

export const layoutSchema = z
  .object({
    schema: z.literal('gustbook/layout/1'),
    name: z.string().trim().min(1).max(80),
    /** `blanks`: one or more blanks or tabs. */
    delimiter: z.enum(['comma', 'semicolon', 'tab', 'blanks', 'pipe']),
    decimal: z.enum(['.', ',']),
    quoted: z.boolean(),
    /** Lines before the first row of data. */
    headerRows: z.number().int().min(0).max(200),
    /** Zero-based lines within the header, or null. */
    nameRow: z.number().int().min(0).max(199).nullable(),
    unitRow: z.number().int().min(0).max(199).nullable(),
    /** Tokens that mean "no value", beside the empty one. */
    missingTokens: z.array(z.string().max(24)).max(24),
    sampleRateHz: z.number().min(1).max(100),
    clock: z.discriminatedUnion('kind', [
      z.object({ kind: z.literal('utc') }),
      z.object({ kind: z.literal('fixed'), offsetMinutes: z.number().int().min(-720).max(840) }),
    ]),
    /** What a stamp marks: the start or the end of its scan. */
    stampMarks: z.enum(['start', 'end']),
    time: timeSourceSchema,
    columns: z.array(columnSchema).min(1).max(64),
  })
  .refine((l) => new Set(l.columns.map((c) => c.channel)).size === l.columns.length, {
    path: ['columns'],
    message: 'A quantity can come from one column only.',
  })
  .refine((l) => l.columns.every((c) => (channelUnits[c.channel] as readonly string[]).includes(c.unit)), {
    path: ['columns'],
    message: 'A column has a unit that its quantity cannot have.',
  })
  .refine((l) => !(l.delimiter === 'comma' && l.decimal === ','), {
    path: ['decimal'],
    message: 'Comma cannot be both delimiter and decimal mark.',
  });
export type Layout = z.infer<typeof layoutSchema>;

/** Channels without which no flux can be computed. */
export const requiredChannels: readonly ChannelKey[] = ['windU', 'windV', 'windW', 'sonicTemperature'];
