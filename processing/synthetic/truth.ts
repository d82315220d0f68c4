import { z } from 'zod';
import { channelKeys } from '../schemas/layout';

/** What is known about invented records: true fluxes, what the instruments did to them, and every planted fault. */

/** Fluxes of one period, in kinematic and in final units. */
export const fluxTruthSchema = z.object({
  /** (uw² + vw²)^¼ [m s⁻¹]. */
  ustarMs: z.number(),
  /** cov(u, w) in streamline axes [m² s⁻²]. */
  uw: z.number(),
  /** cov(w, T), true air temperature [K m s⁻¹]. */
  temperatureFlux: z.number(),
  /** mean(n_d w χ_v) [mol m⁻² s⁻¹]. */
  vapourFlux: z.number(),
  /** E = M_v · vapour flux [kg m⁻² s⁻¹]. */
  evaporation: z.number(),
  /** ρ c_p w'T' [W m⁻²]. */
  sensibleHeat: z.number(),
  /** λ E [W m⁻²]. */
  latentHeat: z.number(),
  /** mean(n_d w χ_c) [µmol m⁻² s⁻¹]. */
  co2Flux: z.number(),
  obukhovLengthM: z.number(),
  /** (z − d)/L. */
  zeta: z.number(),
});
export type FluxTruth = z.infer<typeof fluxTruthSchema>;

/** Fluxes that a fault makes worthless. */
const touched = z.array(z.enum(['momentum', 'sensibleHeat', 'latentHeat', 'co2Flux']));

const faultBase = {
  /** Name within the file, `f1`, `f2`, … */
  id: z.string(),
  /** Start of the averaging period it lies in, ms UTC. */
  periodStartMs: z.number(),
  /** First and last touched instant, ms UTC, by the true clock, half-open. */
  fromMs: z.number(),
  toMs: z.number(),
  /** First touched sample of the period, and how many. */
  firstIndex: z.number().int(),
  samples: z.number().int(),
  fluxes: touched,
  /** Whether the fault is strong enough that the fluxes above must be rejected. */
  rejects: z.boolean(),
  /** What happened, in one sentence. */
  story: z.string(),
};
const channels = z.array(z.enum(channelKeys));

export const faultSchema = z.discriminatedUnion('kind', [
  z.object({
    kind: z.literal('spikes'),
    ...faultBase,
    channels,
    /** Height in standard deviations of the channel. */
    sigmas: z.number(),
    indices: z.record(z.string(), z.array(z.number().int())),
  }),
  /** Channels repeat the value of their first touched sample. */
  z.object({ kind: z.literal('dropout'), ...faultBase, channels }),
  /** A channel writes one value throughout. */
  z.object({ kind: z.literal('stuck'), ...faultBase, channels, value: z.number() }),
  /** Stamps are off by `offsetS` between the two instants; forward first, then back. */
  z.object({ kind: z.literal('clock-jump'), ...faultBase, offsetS: z.number() }),
  /** Rows are absent. */
  z.object({ kind: z.literal('gap'), ...faultBase }),
  /** Rows are written twice with the same stamp. */
  z.object({ kind: z.literal('duplicates'), ...faultBase }),
  /** The instrument reports a code that is not good. */
  z.object({ kind: z.literal('bad-status'), ...faultBase, channels, code: z.number().int() }),
  z.object({ kind: z.literal('low-signal'), ...faultBase, strengthPercent: z.number() }),
  /** Drops on the analyser: bad code, low signal strength and scattered densities. */
  z.object({ kind: z.literal('rain'), ...faultBase, code: z.number().int(), strengthPercent: z.number() }),
  /** Wind reaches the sonic through the mast. */
  z.object({ kind: z.literal('mast-wake'), ...faultBase, directionDeg: z.number() }),
  /** An event that is no turbulence: means change for some minutes. Heights of the change in each quantity. */
  z.object({
    kind: z.literal('front'),
    ...faultBase,
    w: z.number(),
    u: z.number(),
    temperatureK: z.number(),
    /** [mmol mol⁻¹], [µmol mol⁻¹] */
    vapour: z.number(),
    co2: z.number(),
  }),
  /** A channel is written in coarse steps. */
  z.object({ kind: z.literal('coarse'), ...faultBase, channels, step: z.number() }),
]);
export type Fault = z.infer<typeof faultSchema>;
export type FaultKind = Fault['kind'];

export const periodTruthSchema = z.object({
  /** Averaging period, half-open, ms UTC, and its start in station standard time. */
  startMs: z.number(),
  endMs: z.number(),
  stationStart: z.string(),
  samples: z.number().int(),
  seed: z.number(),
  mode: z.enum(['gauss', 'matched', 'quad']),
  cospectra: z.enum(['surface-layer', 'correction']),
  /** Means of the period. */
  means: z.object({
    speedMs: z.number(),
    directionDeg: z.number(),
    temperatureK: z.number(),
    pressurePa: z.number(),
    /** Dry mole fractions: µmol mol⁻¹, mmol mol⁻¹. */
    co2: z.number(),
    vapour: z.number(),
    airDensity: z.number(),
    specificHumidity: z.number(),
    dryAirMolarDensity: z.number(),
  }),
  /** What the generator aimed at: the mean over many periods of this kind. */
  ensemble: fluxTruthSchema,
  /** What this one period holds before any instrument touched it: what a perfect station and a perfect computation would find. */
  realised: fluxTruthSchema,
  /** Mean vertical wind that keeps the flux of dry air zero [m s⁻¹]. */
  densityMeanW: z.number(),
  /** What the slow means store below the sensor: n_d z Δχ_c/Δt [µmol m⁻² s⁻¹]. */
  co2Storage: z.number(),
  instruments: z.object({
    /** Share of each covariance that the sensors keep: Σ Co·T / Σ Co. The correction factor that restores it is 1/share. */
    kept: z.object({ momentum: z.number(), sonicTemperature: z.number(), gas: z.number() }),
    /** The gases are late by both together [s]. */
    alongWindLagS: z.number(),
    loggerLagS: z.number(),
    lateralSeparationM: z.number(),
    /** Rotation of the sonic against the flow, double-rotation angles [deg]. */
    yawDeg: z.number(),
    pitchDeg: z.number(),
    rollDeg: z.number(),
  }),
  faults: z.array(faultSchema),
});
export type PeriodTruth = z.infer<typeof periodTruthSchema>;

export const truthSchema = z.object({
  schema: z.literal('gustbook/truth/1'),
  /** Always true: nothing in these records was measured. */
  invented: z.literal(true),
  group: z.string(),
  station: z.string(),
  utcOffsetMinutes: z.number().int(),
  sampleRateHz: z.number(),
  seed: z.number(),
  /** How the losses were put in, for whoever corrects them. */
  method: z.object({
    transferFunctions: z.array(z.object({ series: z.string(), formula: z.string() })),
    cospectra: z.string(),
    means: z.string(),
    lag: z.string(),
    tilt: z.string(),
    density: z.string(),
  }),
  geometry: z.object({
    heightAboveGroundM: z.number(),
    displacementM: z.number(),
    sonicPathM: z.number(),
    analyserPathM: z.number(),
    analyserResponseTimeS: z.number(),
    separation: z.object({ northM: z.number(), eastM: z.number(), upM: z.number() }),
    boomAzimuthTrueDeg: z.number(),
  }),
  files: z.array(
    z.object({
      name: z.string(),
      fromMs: z.number(),
      toMs: z.number(),
      rows: z.number().int(),
      gzip: z.boolean(),
    }),
  ),
  periods: z.array(periodTruthSchema),
});
export type Truth = z.infer<typeof truthSchema>;
