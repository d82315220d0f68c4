import { z } from 'zod';
import { setUpSchema, stationSchema } from '../../processing/schemas/set-up';
import { addSetUpSchema } from '../../server/contract/api';

/** What the forms of a new station and of a corrected set-up hold: the server's schemas, no others. */

export const newStationFormSchema = z.object({ station: stationSchema, setUp: setUpSchema, why: z.string() });
export const correctionFormSchema = z.object({
  station: stationSchema,
  setUp: setUpSchema,
  why: addSetUpSchema.shape.why,
});

export type StationFormInput = z.input<typeof newStationFormSchema>;
export type StationFormOutput = z.output<typeof newStationFormSchema>;

/** The clock reading of an instant for a date-and-time input: "2027-06-17T12:30". */
export function localOf(iso: string, offsetMinutes: number): string {
  const ms = Date.parse(iso);
  return Number.isNaN(ms) ? '' : new Date(ms + offsetMinutes * 60_000).toISOString().slice(0, 16);
}

/** The instant of a clock reading; '' when it is none. */
export function isoOf(local: string, offsetMinutes: number): string {
  const ms = Date.parse(`${local}:00Z`);
  return Number.isNaN(ms) ? '' : new Date(ms - offsetMinutes * 60_000).toISOString().replace('.000Z', 'Z');
}
