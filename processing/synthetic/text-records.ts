import type { WrittenPeriod, WrittenChannel } from './period';
import { writtenChannels } from './period';

/** Invented records as delimited text, the way a logger writes them: one row per scan, stamp first. */

/** Digits after the point: enough that no channel of the demonstration day comes out in visible steps. */
const decimals: Record<WrittenChannel, number> = {
  windU: 4,
  windV: 4,
  windW: 4,
  sonicTemperature: 4,
  co2: 5,
  h2o: 4,
  airPressure: 3,
};

export const columnNames = [
  'time',
  'wind_x',
  'wind_y',
  'wind_z',
  'sonic_t',
  'co2_dens',
  'h2o_dens',
  'press',
  'sonic_status',
  'analyser_status',
  'signal',
];
export const columnUnits = [
  'station time',
  'm s-1',
  'm s-1',
  'm s-1',
  'degC',
  'mmol m-3',
  'mmol m-3',
  'kPa',
  'code',
  'code',
  '%',
];

/** The three lines before the first row: a remark, names, units. */
export function headerText(remark: string): string {
  return `# INVENTED DATA. ${remark}\n${columnNames.join(',')}\n${columnUnits.join(',')}\n`;
}

/**
 * Rows of a span of one period as ASCII bytes. The returned view belongs to the writer and is overwritten by the next call.
 */
export class RowWriter {
  private buffer = new Uint8Array(1 << 22);
  private at = 0;
  private minute = NaN;
  private readonly prefix = new Uint8Array(17);

  constructor(private readonly utcOffsetMinutes: number) {}

  rows(written: WrittenPeriod, from: number, to: number): Uint8Array {
    this.at = 0;
    const rate = written.sampleRateHz;
    const offsetMs = this.utcOffsetMinutes * 60_000;
    for (let i = from; i < to; i++) {
      if (this.buffer.length - this.at < 1024) this.grow();
      for (let copy = 0; copy < written.rows[i]; copy++) {
        this.stamp(written.startMs + Math.round((i * 1000) / rate) + written.stampOffsetMs[i] + offsetMs);
        for (const channel of writtenChannels) {
          this.buffer[this.at++] = 44;
          this.number(written.values[channel][i], decimals[channel]);
        }
        this.buffer[this.at++] = 44;
        this.number(written.sonicStatus[i], 0);
        this.buffer[this.at++] = 44;
        this.number(written.analyserStatus[i], 0);
        this.buffer[this.at++] = 44;
        this.number(written.signalStrength[i], 1);
        this.buffer[this.at++] = 10;
      }
    }
    return this.buffer.subarray(0, this.at);
  }

  private grow(): void {
    const larger = new Uint8Array(this.buffer.length * 2);
    larger.set(this.buffer);
    this.buffer = larger;
  }

  private stamp(stationMs: number): void {
    const minute = Math.floor(stationMs / 60_000);
    if (minute !== this.minute) {
      this.minute = minute;
      const text = new Date(minute * 60_000).toISOString();
      for (let k = 0; k < 17; k++) this.prefix[k] = text.charCodeAt(k);
      this.prefix[10] = 32;
    }
    this.buffer.set(this.prefix, this.at);
    this.at += 17;
    const inMinute = stationMs - minute * 60_000;
    this.digits(Math.floor(inMinute / 1000), 2);
    this.buffer[this.at++] = 46;
    this.digits(inMinute % 1000, 3);
  }

  private digits(value: number, width: number): void {
    for (let k = width - 1; k >= 0; k--) {
      this.buffer[this.at + k] = 48 + (value % 10);
      value = Math.floor(value / 10);
    }
    this.at += width;
  }

  private number(value: number, places: number): void {
    if (!Number.isFinite(value)) {
      this.buffer[this.at++] = 78;
      this.buffer[this.at++] = 97;
      this.buffer[this.at++] = 78;
      return;
    }
    let scaled = Math.round(Math.abs(value) * 10 ** places);
    if (value < 0 && scaled > 0) this.buffer[this.at++] = 45;
    let width = places + 1;
    for (let limit = 10 ** width; scaled >= limit; limit *= 10) width++;
    const end = this.at + width + (places > 0 ? 1 : 0);
    let position = end - 1;
    for (let k = 0; k < width; k++) {
      if (k === places && places > 0) this.buffer[position--] = 46;
      const next = Math.floor(scaled / 10);
      this.buffer[position--] = 48 + (scaled - next * 10);
      scaled = next;
    }
    this.at = end;
  }
}
