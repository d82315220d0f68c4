import { resolve } from 'node:path';
import { parseArgs } from 'node:util';
import type { DemoOptions } from '../../processing/synthetic/demo-scenario';

/** Arguments of the generator's command line. */

export const help = `Writes raw records of the invented station Hollin Fen, with the true fluxes beside them.

  npm run generate -- --out DIR [options]

  --out DIR             folder to write into; made if absent, must be empty unless --force
  --seed N              whole number; the same seed gives the same records (1)
  --hours A-B           hours of the day, station time (0-24)
  --days N              days from 17 June 2027 on; planted faults lie on the first (1)
  --rate HZ             samples per second: 5, 10, 20, 25, 40 or 50 (20)
  --faults none|demo    plant the faults of the demonstration (demo)
  --mode matched|gauss  matched: each half hour holds its target fluxes exactly;
                        gauss: realised fluxes scatter about them as real ones do (matched)
  --gzip                pack every file, not only every fourth
  --force               write into a folder that is not empty; same names are replaced
  --help                this text

Writes HOF_YYYYMMDD_hhmm.csv[.gz], truth.json (true fluxes and every planted fault), station.json, set-up.json,
layout.json and recipe.json. Progress goes to standard error.

Exit codes: 0 done, 1 could not write, 2 wrong arguments, 3 folder is not empty, 130 interrupted.
`;

export interface GenerateArguments extends DemoOptions {
  out: string;
  fromHour: number;
  toHour: number;
  days: number;
  gzip: boolean;
  force: boolean;
}

export class UsageError extends Error {}

/** @throws UsageError with the reason in words */
export function readArguments(argv: string[]): GenerateArguments | 'help' {
  let values;
  try {
    ({ values } = parseArgs({
      args: argv,
      options: {
        out: { type: 'string' },
        seed: { type: 'string', default: '1' },
        hours: { type: 'string', default: '0-24' },
        days: { type: 'string', default: '1' },
        rate: { type: 'string', default: '20' },
        faults: { type: 'string', default: 'demo' },
        mode: { type: 'string', default: 'matched' },
        gzip: { type: 'boolean', default: false },
        force: { type: 'boolean', default: false },
        help: { type: 'boolean', default: false },
      },
    }));
  } catch (error) {
    throw new UsageError(error instanceof Error ? error.message : String(error));
  }
  if (values.help) return 'help';
  if (!values.out) throw new UsageError('--out is missing.');
  const whole = (text: string, name: string, least: number, most: number) => {
    const number = Number(text);
    if (!/^\d+$/.test(text) || number < least || number > most) {
      throw new UsageError(`--${name} must be a whole number from ${least} to ${most}.`);
    }
    return number;
  };
  const hours = /^(\d{1,2})-(\d{1,2})$/.exec(values.hours);
  const [fromHour, toHour] = hours ? [Number(hours[1]), Number(hours[2])] : [NaN, NaN];
  if (!(fromHour < toHour && toHour <= 24)) throw new UsageError('--hours must be like 9-12, within 0-24.');
  const rate = whole(values.rate, 'rate', 5, 50);
  if (![5, 10, 20, 25, 40, 50].includes(rate))
    throw new UsageError('--rate must be 5, 10, 20, 25, 40 or 50.');
  if (values.faults !== 'none' && values.faults !== 'demo')
    throw new UsageError('--faults must be none or demo.');
  if (values.mode !== 'matched' && values.mode !== 'gauss')
    throw new UsageError('--mode must be matched or gauss.');
  return {
    out: resolve(values.out),
    seed: whole(values.seed, 'seed', 0, Number.MAX_SAFE_INTEGER),
    fromHour,
    toHour,
    days: whole(values.days, 'days', 1, 3660),
    sampleRateHz: rate,
    faults: values.faults,
    mode: values.mode,
    gzip: values.gzip,
    force: values.force,
  };
}
