import { createWriteStream } from 'node:fs';
import type { WriteStream } from 'node:fs';
import { mkdir, open, readdir, writeFile } from 'node:fs/promises';
import type { FileHandle } from 'node:fs/promises';
import { join } from 'node:path';
import { finished } from 'node:stream/promises';
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
import type { DemoFile } from '../../processing/synthetic/demo-scenario';
import { synthesisePeriod } from '../../processing/synthetic/period';
import { RowWriter, headerText } from '../../processing/synthetic/text-records';
import type { PeriodTruth, Truth } from '../../processing/synthetic/truth';
import { UsageError, help, readArguments } from './generate-arguments';
import type { GenerateArguments } from './generate-arguments';

/** Command line of the generator of invented records. One half hour is in memory at a time. */

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

async function generate(options: GenerateArguments): Promise<void> {
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
  let options: GenerateArguments | 'help';
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
