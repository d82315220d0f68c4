import { createWriteStream } from 'node:fs';
import type { WriteStream } from 'node:fs';
import { mkdir, open, readdir, writeFile } from 'node:fs/promises';
import type { FileHandle } from 'node:fs/promises';
import { join, resolve } from 'node:path';
import { finished } from 'node:stream/promises';
import { parseArgs } from 'node:util';
import { createGzip } from 'node:zlib';
import type { Gzip } from 'node:zlib';
import { defaultRecipe } from '../../processing/schemas/recipe';
import {
  demoDayStartMs,
  demoFiles,
  demoGroup,
  demoInstruments,
  demoLayout,
  demoPeriod,
  demoSetUp,
  demoStation,
  truthMethod,
} from '../../processing/synthetic/demo-scenario';
import type { DemoFile, DemoOptions } from '../../processing/synthetic/demo-scenario';
import { synthesisePeriod } from '../../processing/synthetic/period';
import { RowWriter, headerText } from '../../processing/synthetic/text-records';
import type { PeriodTruth, Truth } from '../../processing/synthetic/truth';

/** Command line of the generator of invented records. One half hour is in memory at a time. */

const help = `Writes raw records of the invented station Hollin Fen, with the true fluxes beside them.

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

interface Arguments extends DemoOptions {
  out: string;
  fromHour: number;
  toHour: number;
  days: number;
  gzip: boolean;
  force: boolean;
}

class UsageError extends Error {}

function readArguments(argv: string[]): Arguments | 'help' {
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

/** One raw file being written; every write is awaited, so that the caller's buffer can be used again. */
class RecordFile {
  rows = 0;
  private constructor(
    readonly file: DemoFile,
    private readonly plain: FileHandle | null,
    private readonly packer: Gzip | null,
    private readonly stream: WriteStream | null,
  ) {}

  static async open(folder: string, file: DemoFile): Promise<RecordFile> {
    const path = join(folder, file.name);
    if (!file.gzip) return new RecordFile(file, await open(path, 'w'), null, null);
    const packer = createGzip({ level: 4 });
    const stream = createWriteStream(path);
    packer.pipe(stream);
    return new RecordFile(file, null, packer, stream);
  }

  async write(bytes: Uint8Array): Promise<void> {
    if (this.plain) {
      for (let at = 0; at < bytes.length;) {
        at += (await this.plain.write(bytes, at, bytes.length - at)).bytesWritten;
      }
      return;
    }
    await new Promise<void>((done, fail) => {
      this.packer?.write(bytes, (error) => (error ? fail(error) : done()));
    });
  }

  async close(): Promise<void> {
    await this.plain?.close();
    if (this.packer && this.stream) {
      this.packer.end();
      await finished(this.stream);
    }
  }
}

const dayMs = 86_400_000;

async function generate(options: Arguments): Promise<void> {
  const header = new TextEncoder().encode(
    headerText(
      `${demoGroup}, station ${demoStation.name}; station time, UTC+1; seed ${options.seed}; nothing here was measured.`,
    ),
  );
  const writer = new RowWriter(demoStation.utcOffsetMinutes);
  const truthFiles: Truth['files'] = [];
  const truthPeriods: PeriodTruth[] = [];
  const total = (options.toHour - options.fromHour) * 2 * options.days;
  let done = 0;
  for (let day = 0; day < options.days; day++) {
    const dayStart = demoDayStartMs + day * dayMs;
    const waiting = demoFiles(day, options.fromHour, options.toHour, options.gzip);
    let current: RecordFile | null = null;
    for (let halfHour = options.fromHour * 2; halfHour < options.toHour * 2; halfHour++) {
      const { written, truth } = synthesisePeriod(demoPeriod(day, halfHour, options));
      truthPeriods.push(truth);
      const perMinute = 60 * options.sampleRateHz;
      const firstMinute = halfHour * 30;
      for (let minute = firstMinute; minute < firstMinute + 30;) {
        if (!current) {
          current = await RecordFile.open(options.out, waiting.shift() as DemoFile);
          await current.write(header);
        }
        const until = Math.min(firstMinute + 30, current.file.toMinute);
        const from = (minute - firstMinute) * perMinute;
        const to = (until - firstMinute) * perMinute;
        await current.write(writer.rows(written, from, to));
        for (let i = from; i < to; i++) current.rows += written.rows[i];
        minute = until;
        if (until === current.file.toMinute) {
          await current.close();
          truthFiles.push({
            name: current.file.name,
            fromMs: dayStart + current.file.fromMinute * 60_000,
            toMs: dayStart + current.file.toMinute * 60_000,
            rows: current.rows,
            gzip: current.file.gzip,
          });
          current = null;
        }
      }
      done++;
      process.stderr.write(`\r${done} of ${total} half hours`);
    }
  }
  process.stderr.write('\n');

  const { geometry } = demoInstruments();
  const head: Omit<Truth, 'periods'> = {
    schema: 'gustbook/truth/1',
    invented: true,
    group: demoGroup,
    station: demoStation.name,
    utcOffsetMinutes: demoStation.utcOffsetMinutes,
    sampleRateHz: options.sampleRateHz,
    seed: options.seed,
    method: truthMethod,
    geometry: {
      heightAboveGroundM: geometry.heightAboveGroundM,
      displacementM: demoSetUp.displacementM,
      sonicPathM: geometry.sonicPathM,
      analyserPathM: geometry.analyserPathM,
      analyserResponseTimeS: geometry.analyserResponseTimeS,
      separation: demoSetUp.separation,
      boomAzimuthTrueDeg: geometry.boomAzimuthTrueDeg,
    },
    files: truthFiles,
  };
  // One period a line: lists of spike positions would otherwise fill thousands of lines.
  const headText = JSON.stringify(head, null, 2).replace(/\n\}$/, '');
  const periodLines = truthPeriods.map((period) => `    ${JSON.stringify(period)}`).join(',\n');
  await writeFile(join(options.out, 'truth.json'), `${headText},\n  "periods": [\n${periodLines}\n  ]\n}\n`);
  const json = (name: string, value: unknown) =>
    writeFile(join(options.out, name), `${JSON.stringify(value, null, 2)}\n`);
  await json('station.json', demoStation);
  await json('set-up.json', { ...demoSetUp, sampleRateHz: options.sampleRateHz });
  await json('layout.json', demoLayout(options.sampleRateHz));
  await json('recipe.json', defaultRecipe);
}

async function main(): Promise<number> {
  let options: Arguments | 'help';
  try {
    options = readArguments(process.argv.slice(2));
  } catch (error) {
    if (!(error instanceof UsageError)) throw error;
    process.stderr.write(`${error.message}\n\n${help}`);
    return 2;
  }
  if (options === 'help') {
    process.stdout.write(help);
    return 0;
  }
  try {
    await mkdir(options.out, { recursive: true });
    if (!options.force && (await readdir(options.out)).length > 0) {
      process.stderr.write(`${options.out} is not empty. Choose another folder, or add --force.\n`);
      return 3;
    }
    await generate(options);
    return 0;
  } catch (error) {
    process.stderr.write(`\nCould not write: ${error instanceof Error ? error.message : String(error)}\n`);
    return 1;
  }
}

process.on('SIGINT', () => process.exit(130));
process.on('SIGTERM', () => process.exit(130));
void main().then((code) => {
  process.exitCode = code;
});
