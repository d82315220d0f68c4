import { derivedSeed } from '../numerics/random';
import type { Layout } from '../schemas/layout';
import { trueBoomAzimuthDeg } from '../schemas/set-up';
import type { SetUp, Station } from '../schemas/set-up';
import { drivenPeriod, slowMeans, standardDriver, surfaceFluxes } from './diurnal-driver';
import type { DriverSettings, SlowMeans } from './diurnal-driver';
import type { InstrumentDescription, PeriodDescription, PlannedFault } from './period';
import { columnNames, columnUnits } from './text-records';
import type { CospectrumFamily } from './reference-shapes';
import type { Truth } from './truth';
import type { GeneratorMode } from './turbulence';

/**
 * The demonstration day: Lowmere Field Group, station Hollin Fen, 17 June 2027 in station time. Group, station, people, weather and
 * numbers are INVENTED; the place on the map means nothing.
 *
 * Ten periods carry a fault that makes some of their fluxes worthless, four carry one that should be noticed and does no harm, the rest
 * are clean. Two properties of the set-up hold all day and are corrected by the chain: the sonic leans by 2.5° along the mean wind
 * (pitch only: double rotation can undo no roll), and the gases reach the logger two scans late.
 */

export const demoGroup = 'Lowmere Field Group';

export const demoStation: Station = {
  schema: 'gustbook/station/1',
  name: 'Hollin Fen',
  slug: 'hollin-fen',
  description:
    'Invented demonstration station: fen meadow, sonic at 3.2 m, open-path analyser. No such place.',
  utcOffsetMinutes: 60,
  invented: true,
};

export const demoSetUp: SetUp = {
  schema: 'gustbook/set-up/1',
  validFrom: '2027-04-01T00:00:00Z',
  latitudeDeg: 53.1,
  longitudeDeg: 9.2,
  elevationM: 12,
  canopyHeightM: 0.45,
  displacementM: 0.3,
  roughnessM: 0.045,
  sonicHeightM: 3.2,
  boomAzimuthDeg: 225,
  azimuthReference: 'true',
  magneticDeclinationDeg: 2.1,
  axes: { handedness: 'right', uTowards: 'mast' },
  sonic: {
    serialNumber: 'INV-S-014',
    pathLengthM: 0.1,
    pathElevationDeg: 60,
    crosswindDone: 'yes',
    acceptanceAngleDeg: 45,
  },
  analyser: {
    kind: 'open-path',
    serialNumber: 'INV-G-027',
    pathLengthM: 0.125,
    responseTimeS: 0,
    signalStrengthLimitPercent: null,
  },
  separation: { northM: 0.12, eastM: -0.13, upM: 0 },
  sampleRateHz: 20,
  mastSectorHalfWidthDeg: 45,
  disturbedSectors: [],
};

/** Layout of the demonstration files at a sampling rate. */
export function demoLayout(sampleRateHz: number): Layout {
  const channels = [
    'windU',
    'windV',
    'windW',
    'sonicTemperature',
    'co2',
    'h2o',
    'airPressure',
    'sonicStatus',
    'analyserStatus',
    'signalStrength',
  ] as const;
  return {
    schema: 'gustbook/layout/1',
    name: 'Hollin Fen, one row per scan',
    delimiter: 'comma',
    decimal: '.',
    quoted: false,
    headerRows: 3,
    nameRow: 1,
    unitRow: 2,
    missingTokens: ['NaN', '-9999'],
    sampleRateHz,
    clock: { kind: 'fixed', offsetMinutes: demoStation.utcOffsetMinutes },
    stampMarks: 'start',
    time: { kind: 'stamp', column: 0, format: 'iso' },
    columns: channels.map((channel, k) => ({
      channel,
      index: k + 1,
      name: columnNames[k + 1],
      unit: columnUnits[k + 1],
      knownBy: 'name' as const,
      ...(channel === 'sonicStatus' || channel === 'analyserStatus'
        ? { good: { codes: [0], mask: null, equals: null } }
        : {}),
      ...(channel === 'signalStrength' ? { higherIsBetter: true } : {}),
    })),
  };
}

/** Start of the demonstration day: 17 June 2027, 00:00 station time, in ms UTC. */
export const demoDayStartMs = Date.UTC(2027, 5, 17) - demoStation.utcOffsetMinutes * 60_000;

const driver: DriverSettings = {
  ...standardDriver,
  riseHour: 4.5,
  setHour: 20.5,
  nightUstarMs: 0.14,
  dayUstarMs: 0.27,
  heightM: demoSetUp.sonicHeightM - demoSetUp.displacementM,
  roughnessM: demoSetUp.roughnessM,
  temperatureK: [289, 6],
  vapour: [11, 1],
  co2: [416, 12],
  windSpread: 'integral-model',
  latitudeDeg: demoSetUp.latitudeDeg,
  scalarCorrelation: [0.33, 0.25],
};

/** Wind direction at the hours of the day [deg], not wrapped; on the day with faults the night wind comes round behind the mast. */
const directionKnots: readonly (readonly [number, number])[] = [
  [0, 285],
  [1, 305],
  [2, 328],
  [3, 346],
  [3.5, 356],
  [4, 376],
  [4.5, 356],
  [5, 342],
  [6, 318],
  [7, 292],
  [8, 268],
  [9, 248],
  [10, 236],
  [12, 228],
  [14, 222],
  [16, 218],
  [18, 222],
  [20, 235],
  [22, 262],
  [24, 285],
];

/** Where the wind stays on days without planted faults: short of the mast's sector. */
const mostNortherlyDeg = 350;

function directionAt(hour: number, behindMast: boolean): number {
  const inDay = ((hour % 24) + 24) % 24;
  const next = directionKnots.findIndex(([at]) => at > inDay);
  const [fromHour, fromDeg] = directionKnots[next - 1];
  const [toHour, toDeg] = directionKnots[next];
  const direction = fromDeg + ((toDeg - fromDeg) * (inDay - fromHour)) / (toHour - fromHour);
  return behindMast ? direction : Math.min(direction, mostNortherlyDeg);
}

function meansAt(hour: number, behindMast: boolean): SlowMeans {
  const means = slowMeans(hour, directionAt(hour, behindMast), driver);
  means.pressurePa = 101_150 + 60 * Math.sin((2 * Math.PI * hour) / 24);
  return means;
}

const all = ['momentum', 'sensibleHeat', 'latentHeat', 'co2Flux'] as const;
const gases = ['latentHeat', 'co2Flux'] as const;

/** Faults of the demonstration day by the start of their period, station time. */
const demoFaults: Record<string, PlannedFault[]> = {
  '03:30': [
    {
      kind: 'mast-wake',
      fluxes: [...all],
      rejects: true,
      story: 'The night wind has come round to the north and reaches the sonic through the mast.',
    },
  ],
  '04:00': [
    {
      kind: 'mast-wake',
      fluxes: [...all],
      rejects: true,
      story: 'The wind still comes through the mast, and turns back.',
    },
  ],
  '08:00': [
    {
      kind: 'gap',
      fromS: 671,
      durationS: 3.1,
      fluxes: [],
      rejects: false,
      story: 'The logger lost 3.1 s of rows while it closed a file.',
    },
  ],
  '09:00': [
    {
      kind: 'spikes',
      channels: ['co2', 'h2o'],
      share: 0.025,
      sigmas: 14,
      longestRun: 2,
      fluxes: [...gases],
      rejects: true,
      story: 'Insects swarm in the optical path: one row in forty is a spike.',
    },
  ],
  '09:30': [
    {
      kind: 'spikes',
      channels: ['windW', 'co2'],
      share: 0.002,
      sigmas: 12,
      longestRun: 1,
      fluxes: [],
      rejects: false,
      story: 'A few spikes are left; taking them out is enough.',
    },
  ],
  '10:30': [
    {
      kind: 'dropout',
      channels: ['co2', 'h2o'],
      fromS: 612,
      durationS: 90,
      fluxes: [...gases],
      rejects: true,
      story: 'The link to the analyser hangs for 90 s and its last values are repeated.',
    },
  ],
  '12:00': [
    {
      kind: 'stuck',
      channels: ['sonicTemperature'],
      value: 21.5,
      fluxes: ['sensibleHeat', 'latentHeat', 'co2Flux'],
      rejects: true,
      story: 'Sonic temperature stands at 21.5 °C for the whole half hour.',
    },
  ],
  '14:30': [
    {
      kind: 'front',
      fromS: 620,
      durationS: 480,
      edgeS: 60,
      w: 0.55,
      u: 2.2,
      temperatureK: -2.6,
      vapour: -2.4,
      co2: 4.6,
      fluxes: [...all],
      rejects: true,
      story: 'A cool, dry gust front lifts the air over the fen for eight minutes.',
    },
  ],
  '16:30': [
    {
      kind: 'clock-jump',
      fromS: 600,
      durationS: 720,
      offsetS: 20,
      fluxes: [],
      rejects: false,
      story: 'The clock jumps 20 s ahead and is set back after twelve minutes.',
    },
  ],
  '18:00': [
    {
      kind: 'rain',
      fromS: 600,
      durationS: 1200,
      code: 16,
      strengthPercent: 52,
      fluxes: [...gases],
      rejects: true,
      story: 'Rain from 18:10: drops on the windows, the analyser reports a blocked path.',
    },
  ],
  '18:30': [
    {
      kind: 'rain',
      fromS: 0,
      durationS: 720,
      code: 16,
      strengthPercent: 58,
      fluxes: [...gases],
      rejects: true,
      story: 'The rain ends at 18:42.',
    },
    {
      kind: 'low-signal',
      fromS: 720,
      durationS: 1080,
      strengthPercent: 91,
      fluxes: [],
      rejects: false,
      story: 'The windows dry; signal strength is a little below that of the morning.',
    },
  ],
  '20:00': [
    {
      kind: 'coarse',
      channels: ['h2o'],
      step: 5,
      fluxes: [...gases],
      rejects: true,
      story: 'The vapour channel is written in steps of 5 mmol m⁻³.',
    },
  ],
  '21:30': [
    {
      kind: 'gap',
      fromS: 420,
      durationS: 1080,
      fluxes: [...all],
      rejects: true,
      story: 'The battery sags and 18 minutes of rows are lost.',
    },
  ],
  '22:30': [
    {
      kind: 'gap',
      fromS: 900,
      durationS: 300,
      fluxes: [],
      rejects: false,
      story: 'The battery sags once more, for five minutes.',
    },
  ],
};

export interface DemoOptions {
  seed: number;
  sampleRateHz: number;
  faults: 'none' | 'demo';
  mode?: GeneratorMode;
  cospectra?: CospectrumFamily;
}

/** Invented instruments of Hollin Fen. */
export function demoInstruments(): InstrumentDescription {
  return {
    geometry: {
      heightAboveGroundM: demoSetUp.sonicHeightM,
      heightM: driver.heightM,
      sonicPathM: demoSetUp.sonic.pathLengthM,
      analyserPathM: demoSetUp.analyser.pathLengthM,
      analyserResponseTimeS: demoSetUp.analyser.responseTimeS,
      separation: demoSetUp.separation,
      boomAzimuthTrueDeg: trueBoomAzimuthDeg(demoSetUp),
    },
    blurred: true,
    alongWindLag: true,
    loggerDelayScans: 2,
    pitchDeg: 2.5,
    rollDeg: 0,
    verticalOffsetMs: 0,
    noise: {
      windU: 0.015,
      windV: 0.015,
      windW: 0.01,
      sonicTemperature: 0.02,
      co2: 0.004,
      h2o: 0.1,
      airPressure: 0.002,
    },
    gain: {},
    offset: {},
    signalStrengthPercent: 96,
  };
}

/**
 * One half hour of the demonstration.
 *
 * @param day days since the demonstration day; faults lie on day 0 only
 * @param halfHour 0 … 47 of station time
 */
export function demoPeriod(day: number, halfHour: number, options: DemoOptions): PeriodDescription {
  const hour = halfHour / 2;
  const hasFaults = options.faults === 'demo' && day === 0;
  const means = { start: meansAt(hour, hasFaults), end: meansAt(hour + 0.5, hasFaults) };
  const middle: SlowMeans = {
    speedMs: (means.start.speedMs + means.end.speedMs) / 2,
    directionDeg: (means.start.directionDeg + means.end.directionDeg) / 2,
    temperatureK: (means.start.temperatureK + means.end.temperatureK) / 2,
    vapour: (means.start.vapour + means.end.vapour) / 2,
    co2: (means.start.co2 + means.end.co2) / 2,
    pressurePa: (means.start.pressurePa + means.end.pressurePa) / 2,
  };
  const { targets } = drivenPeriod(surfaceFluxes(hour + 0.25, driver), middle, driver);
  const name = `${String(Math.floor(hour)).padStart(2, '0')}:${halfHour % 2 ? '30' : '00'}`;
  return {
    startMs: demoDayStartMs + (day * 48 + halfHour) * 1_800_000,
    utcOffsetMinutes: demoStation.utcOffsetMinutes,
    durationS: 1800,
    sampleRateHz: options.sampleRateHz,
    seed: derivedSeed(options.seed, day * 48 + halfHour),
    mode: options.mode ?? 'matched',
    cospectra: options.cospectra ?? 'correction',
    means,
    targets,
    instruments: demoInstruments(),
    faults: hasFaults ? (demoFaults[name] ?? []) : [],
  };
}

/** One file of the demonstration: [from, to) in minutes of its day, station time. */
export interface DemoFile {
  day: number;
  fromMinute: number;
  toMinute: number;
  name: string;
  gzip: boolean;
}

/**
 * The files of one day: one per hour, but a card was changed at 07:43 and at 08:17, so that two files begin at odd minutes and one
 * straddles a full hour; every fourth file is packed.
 */
export function demoFiles(day: number, fromHour: number, toHour: number, gzipAll: boolean): DemoFile[] {
  const edges = new Set<number>();
  for (let hour = 0; hour <= 24; hour++) if (hour !== 8) edges.add(hour * 60);
  edges.add(7 * 60 + 43);
  edges.add(8 * 60 + 17);
  const sorted = [...edges].sort((a, b) => a - b);
  const files: DemoFile[] = [];
  for (let k = 0; k + 1 < sorted.length; k++) {
    const fromMinute = Math.max(sorted[k], fromHour * 60);
    const toMinute = Math.min(sorted[k + 1], toHour * 60);
    if (toMinute <= fromMinute) continue;
    const start = new Date(demoDayStartMs + demoStation.utcOffsetMinutes * 60_000 + day * 86_400_000);
    const date = start.toISOString().slice(0, 10).replaceAll('-', '');
    const clock = `${String(Math.floor(fromMinute / 60)).padStart(2, '0')}${String(fromMinute % 60).padStart(2, '0')}`;
    const gzip = gzipAll || k % 4 === 3;
    files.push({ day, fromMinute, toMinute, name: `HOF_${date}_${clock}.csv${gzip ? '.gz' : ''}`, gzip });
  }
  return files;
}

/** What the truth file says about how losses, lags and means were put in. */
export const truthMethod: Truth['method'] = {
  transferFunctions: [
    {
      series: 'u with w',
      formula: 'Tw(f) = (4/X)[1 + exp(-X)/2 - 3(1 - exp(-X))/(2X)], X = 2 pi f l_sonic / U (Moore 1986)',
    },
    {
      series: 'sonic temperature with w',
      formula: 'sqrt(Tw) sqrt(Ts), Ts(f) = (1/X)[3 + exp(-X) - 4(1 - exp(-X))/X], X = 2 pi f l_sonic / U',
    },
    {
      series: 'CO2 and H2O density with w',
      formula:
        'sqrt(Tw; l_sonic) sqrt(Ts; l_analyser) exp(-9.9 (f s_y/U)^1.5), s_y = separation across the wind; first-order response 1/(1 + i 2 pi f tau) where tau > 0',
    },
  ],
  cospectra:
    'Series are drawn line by line with the cospectra that the spectral correction assumes (Kaimal et al. 1972 after Moncrieff et al. 1997), by stability, folded at the Nyquist frequency as sampling does. The transfer function of a covariance acts as amplitude on the series that is not w; w itself is whole. A record holds only what its half hour can hold: no block-average factor is needed to find the truth.',
  means:
    'Means run in straight lines between half-hour boundaries and have no steps there. Fluctuations of neighbouring half hours are drawn apart and, in matched mode, have no correlation to a straight line.',
  lag: 'The gases are late by s_x/U (separation along the wind, a continuous phase) plus a whole number of scans in the logger.',
  tilt: 'Yaw from boom and wind direction, then a constant pitch along the mean wind; no roll and no offset of w.',
  density:
    'Dry air has no mean vertical flux: w has the mean -mean(n_d w)/mean(n_d). True fluxes are mean(n_d w chi); H = rho c_p cov(w, T); Ts = T (1 + 0.51 q).',
};
