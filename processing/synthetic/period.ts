import { celsiusZeroK, molarMassWater } from '../constants';
import { SplitMix64, derivedSeed } from '../numerics/random';
import type { ChannelKey } from '../schemas/layout';
import { airMeans, obukhovLength, seenByOpenPath } from './density-physics';
import type { AirMeans } from './density-physics';
import type { SlowMeans } from './diurnal-driver';
import {
  addSpikes,
  addWhiteNoise,
  blur,
  delay,
  freeze,
  gainAndOffset,
  quantise,
  standardDeviation,
  tilt,
} from './instrument';
import {
  correctionMomentumCospectrumShape,
  correctionScalarCospectrumShape,
  lineGain,
  neutralMomentumCospectrumShape,
  neutralScalarCospectrumShape,
} from './reference-shapes';
import type { CospectrumFamily, LineGain } from './reference-shapes';
import { covarianceTransfer } from './transfer-functions';
import type { BlurredSeries, SensorGeometry } from './transfer-functions';
import type { Fault, FluxTruth, PeriodTruth } from './truth';
import { generateTurbulence } from './turbulence';
import type { GeneratorMode, TurbulenceTargets } from './turbulence';

/**
 * One averaging period of an invented open-path station: true air → what the sensors see → what the logger writes. INVENTED data.
 *
 * Means run in a straight line from their value at the start of the period to that at its end, and the next period begins where this
 * one ended, so that no step at a period boundary looks like a fault and the storage below the sensor follows from the means. The
 * fluctuations of neighbouring periods are drawn apart; in `matched` mode they have no correlation to a straight line, so that the slow
 * means add nothing to a flux.
 */

/** Channels that carry numbers, in the order they are written. */
export const writtenChannels = [
  'windU',
  'windV',
  'windW',
  'sonicTemperature',
  'co2',
  'h2o',
  'airPressure',
] as const;
export type WrittenChannel = (typeof writtenChannels)[number];

/** What the instruments are like. Units of noise and steps: those of the written channel. */
export interface InstrumentDescription {
  geometry: {
    /** Sonic above ground and above displacement [m]. */
    heightAboveGroundM: number;
    heightM: number;
    sonicPathM: number;
    analyserPathM: number;
    analyserResponseTimeS: number;
    /** Analyser minus sonic, geographic axes [m]. */
    separation: { northM: number; eastM: number };
    /** Mast to sensor, true north [deg]; +u points to the mast, right-handed. */
    boomAzimuthTrueDeg: number;
  };
  /** Put in the losses of path averaging, separation and response time. */
  blurred: boolean;
  /** Put in the part of a scan by which the air arrives later at the analyser. */
  alongWindLag: boolean;
  /** Whole scans by which the logger gets the gases late. */
  loggerDelayScans: number;
  pitchDeg: number;
  rollDeg: number;
  /** Error of the zero of w [m s⁻¹]. */
  verticalOffsetMs: number;
  noise: Partial<Record<WrittenChannel, number>>;
  gain: Partial<Record<WrittenChannel, number>>;
  offset: Partial<Record<WrittenChannel, number>>;
  /** Signal strength of a clean window [%]. */
  signalStrengthPercent: number;
}

/** Instruments without any fault of their own. */
export function perfectInstruments(geometry: InstrumentDescription['geometry']): InstrumentDescription {
  return {
    geometry,
    blurred: false,
    alongWindLag: false,
    loggerDelayScans: 0,
    pitchDeg: 0,
    rollDeg: 0,
    verticalOffsetMs: 0,
    noise: {},
    gain: {},
    offset: {},
    signalStrengthPercent: 96,
  };
}

type FluxName = Fault['fluxes'][number];

/** A fault to plant. Times in seconds from the start of the period. */
export type PlannedFault = { fluxes: FluxName[]; rejects: boolean; story: string } & (
  | { kind: 'spikes'; channels: WrittenChannel[]; share: number; sigmas: number; longestRun: number }
  | { kind: 'dropout'; channels: WrittenChannel[]; fromS: number; durationS: number }
  | { kind: 'stuck'; channels: WrittenChannel[]; value: number }
  | { kind: 'clock-jump'; fromS: number; durationS: number; offsetS: number }
  | { kind: 'gap'; fromS: number; durationS: number }
  | { kind: 'duplicates'; fromS: number; durationS: number }
  | {
      kind: 'bad-status';
      channels: ('analyserStatus' | 'sonicStatus')[];
      fromS: number;
      durationS: number;
      code: number;
    }
  | { kind: 'low-signal'; fromS: number; durationS: number; strengthPercent: number }
  | { kind: 'rain'; fromS: number; durationS: number; code: number; strengthPercent: number }
  | { kind: 'mast-wake' }
  | {
      kind: 'front';
      fromS: number;
      durationS: number;
      /** Length of the smooth edges [s]. */
      edgeS: number;
      w: number;
      u: number;
      temperatureK: number;
      vapour: number;
      co2: number;
    }
  | { kind: 'coarse'; channels: WrittenChannel[]; step: number }
);

export interface PeriodDescription {
  /** ms UTC. */
  startMs: number;
  utcOffsetMinutes: number;
  durationS: number;
  sampleRateHz: number;
  seed: number;
  mode: GeneratorMode;
  cospectra: CospectrumFamily;
  /** Means at the start and at the end. */
  means: { start: SlowMeans; end: SlowMeans };
  /** Variances and covariances to aim at, for the mean state of the period. */
  targets: Pick<TurbulenceTargets, 'variances' | 'covariances' | 'residualCorrelation' | 'zeta'>;
  instruments: InstrumentDescription;
  faults: PlannedFault[];
}

/** What the logger wrote in one period, in the units of the written channels. */
export interface WrittenPeriod {
  startMs: number;
  sampleRateHz: number;
  length: number;
  /** m s⁻¹, °C, mmol m⁻³, kPa. */
  values: Record<WrittenChannel, Float64Array>;
  sonicStatus: Int32Array;
  analyserStatus: Int32Array;
  /** [%] */
  signalStrength: Float64Array;
  /** 0: the row is absent, 1: written, 2: written twice. */
  rows: Uint8Array;
  /** Stamp minus true instant of each scan [ms]. */
  stampOffsetMs: Int32Array;
}

export interface SyntheticPeriod {
  written: WrittenPeriod;
  truth: PeriodTruth;
}

/**
 * Makes one period. The same description gives the same numbers.
 *
 * @throws RangeError when the targets cannot be met (see `generateTurbulence`)
 */
export function synthesisePeriod(description: PeriodDescription): SyntheticPeriod {
  const { sampleRateHz, means, instruments, seed } = description;
  const n = Math.round(description.durationS * sampleRateHz);
  const geometry = instruments.geometry;
  const middle = halfWay(means.start, means.end);

  // True air ---------------------------------------------------------------------------------------------------------
  const turbulenceTargets: TurbulenceTargets = {
    ...description.targets,
    sampleRateHz,
    length: n,
    heightM: geometry.heightM,
    meanSpeedMs: middle.speedMs,
    cospectra: description.cospectra,
    mode: description.mode,
  };
  const { series, cospectra } = generateTurbulence(turbulenceTargets, new SplitMix64(derivedSeed(seed, 1)));
  const temperature = series.temperature;
  const vapour = series.vapour;
  const co2 = series.co2;
  const pressure = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    const t = (i + 0.5) / n;
    const at = (key: keyof SlowMeans) => means.start[key] + t * (means.end[key] - means.start[key]);
    const turn = ((at('directionDeg') - middle.directionDeg) * Math.PI) / 180;
    const speed = at('speedMs');
    series.u[i] += speed * Math.cos(turn);
    // A flow that has turned clockwise (seen from above) has come to blow to the right, which is −v.
    series.v[i] -= speed * Math.sin(turn);
    temperature[i] += at('temperatureK');
    vapour[i] = (vapour[i] + at('vapour')) * 1e-3;
    co2[i] = (co2[i] + at('co2')) * 1e-6;
    pressure[i] = at('pressurePa');
  }
  for (const fault of description.faults) {
    if (fault.kind !== 'front') continue;
    const pulse = smoothPulse(n, sampleRateHz, fault.fromS, fault.durationS, fault.edgeS);
    let pulseMean = 0;
    for (const value of pulse) pulseMean += value / n;
    for (let i = 0; i < n; i++) {
      // What rises in the pulse sinks, more slowly, in the rest: no mean vertical wind.
      series.w[i] += fault.w * (pulse[i] - pulseMean);
      series.u[i] += fault.u * pulse[i];
      temperature[i] += fault.temperatureK * pulse[i];
      vapour[i] += fault.vapour * 1e-3 * pulse[i];
      co2[i] += fault.co2 * 1e-6 * pulse[i];
    }
  }
  const seen = seenByOpenPath({ w: series.w, temperature, vapour, co2, pressure });
  const air = airMeans(mean(temperature), mean(pressure), mean(seen.vapourDensity));

  // True fluxes ------------------------------------------------------------------------------------------------------
  const uw = covariance(series.u, seen.w);
  const vw = covariance(series.v, seen.w);
  const realised = fluxTruth(
    (uw * uw + vw * vw) ** 0.25,
    uw,
    seen.temperatureFlux,
    seen.vapourFlux,
    seen.co2Flux,
    air,
    geometry.heightM,
  );
  const { covariances } = description.targets;
  const ensemble = fluxTruth(
    Math.sqrt(Math.abs(covariances.u)),
    covariances.u,
    covariances.temperature,
    covariances.vapour * 1e-3 * air.dryAirMolarDensity,
    covariances.co2 * 1e-6 * air.dryAirMolarDensity,
    air,
    geometry.heightM,
  );

  // Sensors ----------------------------------------------------------------------------------------------------------
  const across = separationInWind(geometry.separation, middle.directionDeg);
  const sensors: SensorGeometry = {
    sonicPathM: geometry.sonicPathM,
    analyserPathM: geometry.analyserPathM,
    lateralSeparationM: Math.abs(across.acrossM),
    alongWindLagS: instruments.alongWindLag ? across.alongM / middle.speedMs : 0,
    analyserResponseTimeS: geometry.analyserResponseTimeS,
  };
  const kept = { momentum: 1, sonicTemperature: 1, gas: 1 };
  if (instruments.blurred) {
    const folded = description.cospectra === 'correction';
    const momentum = folded
      ? correctionMomentumCospectrumShape(description.targets.zeta)
      : neutralMomentumCospectrumShape;
    const scalar = folded
      ? correctionScalarCospectrumShape(description.targets.zeta)
      : neutralScalarCospectrumShape;
    const gainOf = (blurred: BlurredSeries, shape: (x: number) => number): LineGain =>
      lineGain(
        (f) => covarianceTransfer(blurred, f, middle.speedMs, sensors),
        shape,
        n,
        sampleRateHz,
        geometry.heightM / middle.speedMs,
        folded,
      );
    const gainU = gainOf('u', momentum);
    const gainT = gainOf('sonicTemperature', scalar);
    const gainGas = gainOf('gas', scalar);
    blur(series.u, gainU, seen.sonicTemperature, gainT);
    blur(seen.co2Density, gainGas, seen.vapourDensity, gainGas);
    kept.momentum = keptShare(cospectra.u, gainU, 0);
    kept.sonicTemperature = keptShare(cospectra.temperature, gainT, 0);
    // Counted at the best lag, as the losses of a chain that looks for it.
    kept.gas = keptShare(cospectra.vapour, gainGas, (2 * Math.PI * sensors.alongWindLagS * sampleRateHz) / n);
  }
  delay(seen.co2Density, instruments.loggerDelayScans);
  delay(seen.vapourDensity, instruments.loggerDelayScans);
  const yawRad = ((geometry.boomAzimuthTrueDeg - middle.directionDeg) * Math.PI) / 180;
  const pitchRad = (instruments.pitchDeg * Math.PI) / 180;
  const rollRad = (instruments.rollDeg * Math.PI) / 180;
  tilt(series.u, series.v, seen.w, { yawRad, pitchRad, rollRad });

  // Logger -----------------------------------------------------------------------------------------------------------
  const values: Record<WrittenChannel, Float64Array> = {
    windU: series.u,
    windV: series.v,
    windW: seen.w,
    sonicTemperature: seen.sonicTemperature,
    co2: seen.co2Density,
    h2o: seen.vapourDensity,
    airPressure: pressure,
  };
  for (let i = 0; i < n; i++) {
    values.windW[i] += instruments.verticalOffsetMs;
    values.sonicTemperature[i] -= celsiusZeroK;
    values.co2[i] *= 1e3;
    values.h2o[i] *= 1e3;
    values.airPressure[i] *= 1e-3;
  }
  const noise = new SplitMix64(derivedSeed(seed, 2));
  for (const channel of writtenChannels) {
    gainAndOffset(values[channel], instruments.gain[channel] ?? 1, instruments.offset[channel] ?? 0);
    addWhiteNoise(values[channel], instruments.noise[channel] ?? 0, noise);
  }
  const signalStrength = new Float64Array(n).fill(instruments.signalStrengthPercent);
  addWhiteNoise(signalStrength, 0.2, noise);
  const written: WrittenPeriod = {
    startMs: description.startMs,
    sampleRateHz,
    length: n,
    values,
    sonicStatus: new Int32Array(n),
    analyserStatus: new Int32Array(n),
    signalStrength,
    rows: new Uint8Array(n).fill(1),
    stampOffsetMs: new Int32Array(n),
  };
  const faultRandom = new SplitMix64(derivedSeed(seed, 3));
  const faults = description.faults.map((fault, index) =>
    plant(fault, `f${index + 1}`, written, middle.directionDeg, faultRandom),
  );

  const stationStart = new Date(description.startMs + description.utcOffsetMinutes * 60_000);
  return {
    written,
    truth: {
      startMs: description.startMs,
      endMs: description.startMs + description.durationS * 1000,
      stationStart: stationStart.toISOString().slice(0, 16),
      samples: n,
      seed,
      mode: description.mode,
      cospectra: description.cospectra,
      means: {
        speedMs: middle.speedMs,
        directionDeg: ((middle.directionDeg % 360) + 360) % 360,
        temperatureK: air.temperatureK,
        pressurePa: air.pressurePa,
        co2: middle.co2,
        vapour: middle.vapour,
        airDensity: air.airDensity,
        specificHumidity: air.specificHumidity,
        dryAirMolarDensity: air.dryAirMolarDensity,
      },
      ensemble,
      realised,
      densityMeanW: seen.meanW,
      co2Storage:
        (air.dryAirMolarDensity * geometry.heightAboveGroundM * (means.end.co2 - means.start.co2)) /
        description.durationS,
      instruments: {
        kept,
        alongWindLagS: sensors.alongWindLagS,
        loggerLagS: instruments.loggerDelayScans / sampleRateHz,
        lateralSeparationM: sensors.lateralSeparationM,
        yawDeg: (yawRad * 180) / Math.PI,
        pitchDeg: instruments.pitchDeg,
        rollDeg: instruments.rollDeg,
      },
      faults,
    },
  };
}

/**
 * Separation in the axes of the wind.
 *
 * @param directionDeg where the wind comes from
 * @returns along: positive when the air reaches the analyser later than the sonic; across: to the left of the flow [m]
 */
export function separationInWind(
  separation: { northM: number; eastM: number },
  directionDeg: number,
): { alongM: number; acrossM: number } {
  const from = (directionDeg * Math.PI) / 180;
  // The flow moves towards (−sin, −cos) in (east, north).
  const [toEast, toNorth] = [-Math.sin(from), -Math.cos(from)];
  return {
    alongM: separation.eastM * toEast + separation.northM * toNorth,
    acrossM: separation.northM * toEast - separation.eastM * toNorth,
  };
}

function halfWay(a: SlowMeans, b: SlowMeans): SlowMeans {
  return {
    speedMs: (a.speedMs + b.speedMs) / 2,
    directionDeg: (a.directionDeg + b.directionDeg) / 2,
    temperatureK: (a.temperatureK + b.temperatureK) / 2,
    vapour: (a.vapour + b.vapour) / 2,
    co2: (a.co2 + b.co2) / 2,
    pressurePa: (a.pressurePa + b.pressurePa) / 2,
  };
}

function mean(x: Float64Array): number {
  let sum = 0;
  for (const value of x) sum += value;
  return sum / x.length;
}

function covariance(a: Float64Array, b: Float64Array): number {
  const [meanA, meanB] = [mean(a), mean(b)];
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += (a[i] - meanA) * (b[i] - meanB);
  return sum / a.length;
}

function fluxTruth(
  ustarMs: number,
  uw: number,
  temperatureFlux: number,
  vapourFlux: number,
  co2Flux: number,
  air: AirMeans,
  heightM: number,
): FluxTruth {
  const evaporation = vapourFlux * molarMassWater;
  const obukhovLengthM = obukhovLength(ustarMs, temperatureFlux, evaporation, air);
  return {
    ustarMs,
    uw,
    temperatureFlux,
    vapourFlux,
    evaporation,
    sensibleHeat: air.airDensity * air.heatCapacity * temperatureFlux,
    latentHeat: air.latentHeat * evaporation,
    co2Flux: co2Flux * 1e6,
    obukhovLengthM,
    zeta: heightM / obukhovLengthM,
  };
}

/** Σ Co·Re(gain·e^(+iφk)) over the lines; φ turns the along-wind delay back. */
function keptShare(cospectrum: Float64Array, gain: LineGain, phasePerLine: number): number {
  let sum = 0;
  for (let k = 1; k < cospectrum.length; k++) {
    const c = Math.cos(phasePerLine * k);
    const s = Math.sin(phasePerLine * k);
    sum += cospectrum[k] * (gain.re[k] * c - gain.im[k] * s);
  }
  return sum;
}

/** 1 between two instants with raised-cosine edges centred on them, 0 outside. */
function smoothPulse(n: number, rate: number, fromS: number, durationS: number, edgeS: number): Float64Array {
  const rise = (x: number) => (x <= -0.5 ? 0 : x >= 0.5 ? 1 : 0.5 + 0.5 * Math.sin(Math.PI * x));
  return Float64Array.from({ length: n }, (_, i) => {
    const t = i / rate;
    return rise((t - fromS) / edgeS) * (1 - rise((t - fromS - durationS) / edgeS));
  });
}

/** Plants one fault into what is written and describes it. */
function plant(
  fault: PlannedFault,
  id: string,
  written: WrittenPeriod,
  directionDeg: number,
  random: SplitMix64,
): Fault {
  const { length: n, sampleRateHz: rate, values } = written;
  const from = 'fromS' in fault ? Math.min(n, Math.round(fault.fromS * rate)) : 0;
  const to = 'fromS' in fault ? Math.min(n, from + Math.round(fault.durationS * rate)) : n;
  const base = {
    id,
    periodStartMs: written.startMs,
    fromMs: written.startMs + Math.round((from * 1000) / rate),
    toMs: written.startMs + Math.round((to * 1000) / rate),
    firstIndex: from,
    samples: to - from,
    fluxes: fault.fluxes,
    rejects: fault.rejects,
    story: fault.story,
  };
  switch (fault.kind) {
    case 'spikes': {
      const indices: Record<string, number[]> = {};
      const runs = Math.round((fault.share * n * 2) / (1 + fault.longestRun));
      for (const channel of fault.channels) {
        indices[channel] = addSpikes(values[channel], runs, fault.sigmas, fault.longestRun, random);
      }
      const touched = new Set(Object.values(indices).flat());
      return {
        kind: 'spikes',
        ...base,
        samples: touched.size,
        channels: fault.channels,
        sigmas: fault.sigmas,
        indices,
      };
    }
    case 'dropout':
      for (const channel of fault.channels) freeze(values[channel], from, to);
      return { kind: 'dropout', ...base, channels: fault.channels };
    case 'stuck':
      for (const channel of fault.channels) values[channel].fill(fault.value);
      return { kind: 'stuck', ...base, channels: fault.channels, value: fault.value };
    case 'clock-jump':
      written.stampOffsetMs.fill(Math.round(fault.offsetS * 1000), from, to);
      return { kind: 'clock-jump', ...base, offsetS: fault.offsetS };
    case 'gap':
      written.rows.fill(0, from, to);
      return { kind: 'gap', ...base };
    case 'duplicates':
      written.rows.fill(2, from, to);
      return { kind: 'duplicates', ...base };
    case 'bad-status':
      for (const channel of fault.channels) written[channel].fill(fault.code, from, to);
      return {
        kind: 'bad-status',
        ...base,
        channels: fault.channels satisfies ChannelKey[],
        code: fault.code,
      };
    case 'low-signal':
      for (let i = from; i < to; i++) {
        written.signalStrength[i] = fault.strengthPercent + 0.5 * random.normal();
      }
      return { kind: 'low-signal', ...base, strengthPercent: fault.strengthPercent };
    case 'rain': {
      const scatter = {
        co2: 10 * standardDeviation(values.co2),
        h2o: 4 * standardDeviation(values.h2o),
      };
      for (let i = from; i < to; i++) {
        written.analyserStatus[i] = fault.code;
        written.signalStrength[i] = fault.strengthPercent + 8 * random.normal();
        values.co2[i] += scatter.co2 * random.normal();
        values.h2o[i] += scatter.h2o * random.normal();
      }
      return { kind: 'rain', ...base, code: fault.code, strengthPercent: fault.strengthPercent };
    }
    case 'mast-wake':
      return { kind: 'mast-wake', ...base, directionDeg: ((directionDeg % 360) + 360) % 360 };
    case 'front':
      return {
        kind: 'front',
        ...base,
        w: fault.w,
        u: fault.u,
        temperatureK: fault.temperatureK,
        vapour: fault.vapour,
        co2: fault.co2,
      };
    case 'coarse':
      for (const channel of fault.channels) quantise(values[channel], fault.step);
      return { kind: 'coarse', ...base, channels: fault.channels, step: fault.step };
  }
}
