import { parseArgs } from 'node:util';
import { availableParallelism } from 'node:os';

/** Arguments of the command line that turns raw records into half-hourly fluxes. */

export const exitCodes = {
  done: 0,
  usage: 1,
  input: 2,
  nothing: 3,
  output: 4,
  failure: 5,
  interrupted: 130,
} as const;

export const help = `Computes fluxes from raw records, without a server.

  npm run compute -- --station FILE --layout FILE --out FILE [options] RECORDS…

  --station FILE        {"station": …, "setUps": […]}; or a station alone, with --set-up
  --set-up FILE         a set-up; may be given several times
  --layout FILE         how the records are laid out
  --recipe FILE         processing settings (the standard open-path recipe)
  --out FILE            table of results; - writes to standard output
  --format plain|exchange
                        plain: every value with its unit, grades and reasons;
                        exchange: the flux networks' half-hourly layout (plain)
  --json FILE           everything: values, grades, reasons, step ledgers, curves, reports of the files
  --from TIME           first instant wanted, ISO 8601; without offset it is station standard time (first scan)
  --to TIME             first instant not wanted (last scan)
  --threads N           threads for reading and computing (as many as the machine has, at most 4)
  --quiet               no progress
  --help                this text

RECORDS are text files, plain or gzip, in any order. Where two hold the same instant, the one that began earlier is
used. Progress and warnings go to standard error. Chunks are kept in a temporary folder while they are needed.

Exit codes
  0   all files were read and results written
  1   the arguments, or the station, layout or recipe, are wrong; nothing was done
  2   a file could not be read or used; results of the others were written
  3   nothing could be computed; no table was written
  4   results could not be written
  5   failed inside; please report it
  130 interrupted; no table was written
`;

export interface ComputeArguments {
  station: string;
  setUps: string[];
  layout: string;
  recipe: string | null;
  out: string;
  format: 'plain' | 'exchange';
  json: string | null;
  from: string | null;
  to: string | null;
  threads: number;
  quiet: boolean;
  files: string[];
}

export class UsageError extends Error {}

/** @throws UsageError with the reason in words */
export function readArguments(argv: string[]): ComputeArguments | 'help' {
  let values;
  let positionals;
  try {
    ({ values, positionals } = parseArgs({
      args: argv,
      allowPositionals: true,
      options: {
        station: { type: 'string' },
        'set-up': { type: 'string', multiple: true, default: [] },
        layout: { type: 'string' },
        recipe: { type: 'string' },
        out: { type: 'string' },
        format: { type: 'string', default: 'plain' },
        json: { type: 'string' },
        from: { type: 'string' },
        to: { type: 'string' },
        threads: { type: 'string' },
        quiet: { type: 'boolean', default: false },
        help: { type: 'boolean', default: false },
      },
    }));
  } catch (error) {
    throw new UsageError(error instanceof Error ? error.message : String(error));
  }
  if (values.help) return 'help';
  const needed = (name: 'station' | 'layout' | 'out'): string => {
    const value = values[name];
    if (value === undefined || value === '') throw new UsageError(`--${name} is missing.`);
    return value;
  };
  const { format } = values;
  if (format !== 'plain' && format !== 'exchange')
    throw new UsageError(`--format is plain or exchange, not "${format}".`);
  const threads = values.threads === undefined ? Math.min(4, availableParallelism()) : Number(values.threads);
  if (!Number.isInteger(threads) || threads < 1 || threads > 64)
    throw new UsageError(`--threads is a whole number from 1 to 64, not "${values.threads}".`);
  if (positionals.length === 0) throw new UsageError('No records were given.');
  return {
    station: needed('station'),
    setUps: values['set-up'],
    layout: needed('layout'),
    recipe: values.recipe ?? null,
    out: needed('out'),
    format,
    json: values.json ?? null,
    from: values.from ?? null,
    to: values.to ?? null,
    threads,
    quiet: values.quiet,
    files: positionals,
  };
}

/**
 * An instant of the command line.
 *
 * @returns ms UTC; a text without offset is station standard time
 * @throws UsageError
 */
export function readInstant(name: string, text: string, utcOffsetMinutes: number): number {
  const match = /^(\d{4}-\d{2}-\d{2})(?:[T ](\d{2}:\d{2}(?::\d{2})?))?(Z|[+-]\d{2}:\d{2})?$/.exec(text);
  const ms = match === null ? NaN : Date.parse(`${match[1]}T${match[2] ?? '00:00'}${match[3] ?? 'Z'}`);
  if (match === null || Number.isNaN(ms))
    throw new UsageError(`--${name} is a time such as 2027-06-17T10:30, not "${text}".`);
  return match[3] === undefined ? ms - utcOffsetMinutes * 60_000 : ms;
}
