import { celsiusZeroK } from '../constants';
import type { Block } from '../state';
import type { WrittenPeriod } from './period';

/** A synthetic period as the block a chain starts from, without the way through text: stamps are taken as true. */
export function blockOfWritten(written: WrittenPeriod): Block {
  const { length, values } = written;
  const present = Uint8Array.from(written.rows, (rows) => (rows > 0 ? 1 : 0));
  const kept = (from: Float64Array, scale = 1, shift = 0) =>
    Float64Array.from(from, (x, i) => (present[i] ? scale * x + shift : NaN));
  let rowsRead = 0;
  let duplicates = 0;
  for (const rows of written.rows) {
    rowsRead += rows;
    if (rows > 1) duplicates += rows - 1;
  }
  return {
    startMs: written.startMs,
    endMs: written.startMs + Math.round((length * 1000) / written.sampleRateHz),
    sampleRateHz: written.sampleRateHz,
    length,
    values: {
      windU: kept(values.windU),
      windV: kept(values.windV),
      windW: kept(values.windW),
      sonicTemperature: kept(values.sonicTemperature, 1, celsiusZeroK),
      co2: kept(values.co2),
      h2o: kept(values.h2o),
      airPressure: kept(values.airPressure, 1000),
      signalStrength: kept(written.signalStrength),
    },
    status: { sonicStatus: written.sonicStatus.slice(), analyserStatus: written.analyserStatus.slice() },
    present,
    gasMeasures: { co2: 'molar-density', h2o: 'molar-density' },
    intake: {
      rowsRead,
      duplicates,
      clockJumps: 0,
      backwardSteps: 0,
      largestJumpS: 0,
      fittedRateHz: written.sampleRateHz,
      rawFiles: [],
    },
    margins: { before: null, after: null },
  };
}
