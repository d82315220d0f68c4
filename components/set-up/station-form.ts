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

/** Words for people where a field is empty or out of range; messages that the schema itself brings stay. */
export const formWords: z.core.ParseContext<z.core.$ZodIssue> = {
  error: (issue) => {
    if (issue.code === 'invalid_type')
      return issue.expected === 'number' ? 'Write a number.' : 'Write something here.';
    if (issue.code === 'too_small')
      return issue.origin === 'string' ? 'Write something here.' : `At least ${String(issue.minimum)}.`;
    if (issue.code === 'too_big')
      return issue.origin === 'string'
        ? `At most ${String(issue.maximum)} characters.`
        : `At most ${String(issue.maximum)}.`;
    return undefined;
  },
};

/** The clock reading of an instant for a date-and-time input: "2027-06-17T12:30". */
export function localOf(iso: string, offsetMinutes: number): string {
  const ms = Date.parse(iso);
  return Number.isNaN(ms) ? '' : new Date(ms + offsetMinutes * 60_000).toISOString().slice(0, 16);
}

/** The instant of a clock reading; '' when it is none. */
export function isoOf(local: string, offsetMinutes: number): string {
  const ms = /^\d{4}-\d{2}-\d{2}T\d{2}:\d{2}$/.test(local) ? Date.parse(`${local}:00Z`) : Number.NaN;
  return Number.isNaN(ms) ? '' : new Date(ms - offsetMinutes * 60_000).toISOString().replace('.000Z', 'Z');
}
