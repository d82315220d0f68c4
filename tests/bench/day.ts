import {
  closeSync,
  existsSync,
  mkdirSync,
  openSync,
  readFileSync,
  rmSync,
  writeFileSync,
  writeSync,
} from 'node:fs';
import { join } from 'node:path';
import { defaultRecipe } from '../../processing/schemas/recipe';
import {
  demoDayStartMs,
  demoGroup,
  demoLayout,
  demoPeriod,
  demoSetUp,
  demoStation,
} from '../../processing/synthetic/demo-scenario';
import { synthesisePeriod } from '../../processing/synthetic/period';
import { headerText, RowWriter } from '../../processing/synthetic/text-records';

/** Raw records to measure speed with: the invented demonstration day in plain hourly files, and weeks made from it by changing dates. */

const sampleRateHz = 20;
const hours = 24;

function stationDate(day: number): string {
  const ms = demoDayStartMs + demoStation.utcOffsetMinutes * 60_000 + day * 86_400_000;
  return new Date(ms).toISOString().slice(0, 10);
}

function fileName(day: number, hour: number): string {
  return `HOF_${stationDate(day).replaceAll('-', '')}_${String(hour).padStart(2, '0')}00.csv`;
}

export interface RecordFolder {
  folder: string;
  paths: string[];
}

/** Files and descriptions of some days; written once and kept. */
function keep(folder: string, days: number, write: (part: string) => void): RecordFolder {
  const paths: string[] = [];
  for (let day = 0; day < days; day++)
    for (let hour = 0; hour < hours; hour++) paths.push(join(folder, fileName(day, hour)));
  const done = join(folder, 'done');
  if (!existsSync(done)) {
    rmSync(folder, { recursive: true, force: true });
    mkdirSync(folder, { recursive: true });
    const describe = (name: string, value: unknown): void =>
      writeFileSync(join(folder, name), `${JSON.stringify(value, null, 2)}\n`);
    describe('station.json', { station: demoStation, setUps: [{ ...demoSetUp, sampleRateHz }] });
    describe('set-up.json', { ...demoSetUp, sampleRateHz });
    describe('layout.json', demoLayout(sampleRateHz));
    describe('recipe.json', defaultRecipe);
    write(folder);
    writeFileSync(done, '');
  }
  return { folder, paths };
}

/** The demonstration day with all its faults, in 24 files. */
export function benchDay(cache: string, seed: number, onHour: (hour: number) => void): RecordFolder {
  return keep(join(cache, `day-${seed}`), 1, (folder) => {
    const header = Buffer.from(
      headerText(`${demoGroup}, station ${demoStation.name}; seed ${seed}; nothing here was measured.`),
    );
    const writer = new RowWriter(demoStation.utcOffsetMinutes);
    for (let hour = 0; hour < hours; hour++) {
      const fd = openSync(join(folder, fileName(0, hour)), 'w');
      writeSync(fd, header);
      for (const halfHour of [2 * hour, 2 * hour + 1]) {
        const { written } = synthesisePeriod(
          demoPeriod(0, halfHour, { seed, sampleRateHz, faults: 'demo', mode: 'matched' }),
        );
        const rows = 60 * sampleRateHz;
        for (let minute = 0; minute < 30; minute++) {
          const bytes = writer.rows(written, minute * rows, (minute + 1) * rows);
          for (let at = 0; at < bytes.length;) at += writeSync(fd, bytes, at);
        }
      }
      closeSync(fd);
      onHour(hour);
    }
  });
}

/** The same day again and again under later dates. */
export function benchDays(cache: string, day: RecordFolder, seed: number, days: number): RecordFolder {
  return keep(join(cache, `days-${seed}-${days}`), days, (folder) => {
    const written = Buffer.from(stationDate(0));
    for (const [hour, path] of day.paths.entries()) {
      const bytes = readFileSync(path);
      for (let k = 0; k < days; k++) {
        const date = Buffer.from(stationDate(k));
        for (let at = bytes.indexOf(k === 0 ? written : Buffer.from(stationDate(k - 1))); at >= 0;) {
          bytes.set(date, at);
          at = bytes.indexOf(k === 0 ? written : Buffer.from(stationDate(k - 1)), at + date.length);
        }
        writeFileSync(join(folder, fileName(k, hour)), bytes);
      }
    }
  });
}
