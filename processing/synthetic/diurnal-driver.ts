import { gasConstant, molarMassWater, vonKarman } from '../constants';
import { airMeans, obukhovLength } from './density-physics';
import type { AirMeans } from './density-physics';
import type { TurbulenceTargets } from './turbulence';

/**
 * An invented day: fluxes and means as smooth functions of the hour. Amplitudes are those of a mid-latitude meadow in fine weather
 * (project choice, no publication claims them).
 */
export interface DriverSettings {
  /** Hours of station time between which the surface gains energy. */
  riseHour: number;
  setHour: number;
  /** Friction velocity at night and what the day adds [m s⁻¹]. */
  nightUstarMs: number;
  dayUstarMs: number;
  /** z − d and z0 [m]. */
  heightM: number;
  roughnessM: number;
  pressurePa: number;
  /** Daily course of the means: mean and half amplitude. */
  temperatureK: readonly [number, number];
  /** Dry mole fractions: vapour [mmol mol⁻¹], CO₂ [µmol mol⁻¹]. */
  vapour: readonly [number, number];
  co2: readonly [number, number];
  /**
   * Standard deviations of the wind: `power-law` rises smoothly with instability from 1.25 u* (w) and 2.2 u* (u); `integral-model` is
   * what the integral turbulence test expects near neutral (Thomas and Foken 2002, from memory), so that an undisturbed invented period
   * passes that test.
   */
  windSpread: 'power-law' | 'integral-model';
  latitudeDeg: number;
  /**
   * Correlation of w with a scalar, unstable and stable. Above about 0.33 the largest unstable eddies would need a correlation beyond
   * 0.95 and the cospectrum is bent there (0.5 % more loss in the small eddies).
   */
  scalarCorrelation: readonly [number, number];
}

export const standardDriver: DriverSettings = {
  riseHour: 6,
  setHour: 18,
  nightUstarMs: 0.12,
  dayUstarMs: 0.28,
  heightM: 3.8,
  roughnessM: 0.03,
  pressurePa: 100_000,
  temperatureK: [288, 6],
  vapour: [10, 0],
  co2: [410, 0],
  windSpread: 'power-law',
  latitudeDeg: 53,
  scalarCorrelation: [0.5, 0.25],
};

/** Means at one instant, before turbulence. */
export interface SlowMeans {
  speedMs: number;
  /** Where the wind comes from, true north [deg], not wrapped so that it can be interpolated. */
  directionDeg: number;
  temperatureK: number;
  /** Dry mole fractions: mmol mol⁻¹ and µmol mol⁻¹. */
  vapour: number;
  co2: number;
  pressurePa: number;
}

/** Fluxes of the surface at one instant. */
export interface SurfaceFluxes {
  ustarMs: number;
  sensibleHeat: number;
  latentHeat: number;
  /** [µmol m⁻² s⁻¹] */
  co2Flux: number;
}

/** Strength of the day, 0 at night to 1 at its middle. */
function dayStrength(hour: number, settings: DriverSettings): number {
  const inDay = (((hour % 24) + 24) % 24) - settings.riseHour;
  return Math.max(0, Math.sin((Math.PI * inDay) / (settings.setHour - settings.riseHour)));
}

export function surfaceFluxes(hour: number, settings: DriverSettings): SurfaceFluxes {
  const s = dayStrength(hour, settings);
  return {
    ustarMs: settings.nightUstarMs + settings.dayUstarMs * s ** 0.7,
    sensibleHeat: -20 + 250 * s,
    latentHeat: 10 + 300 * s ** 1.2,
    co2Flux: 3 - 18 * s,
  };
}

export function slowMeans(hour: number, directionDeg: number, settings: DriverSettings): SlowMeans {
  const course = Math.sin((2 * Math.PI * (hour - 9)) / 24);
  const { ustarMs } = surfaceFluxes(hour, settings);
  return {
    speedMs: (ustarMs / vonKarman) * Math.log(settings.heightM / settings.roughnessM),
    directionDeg,
    temperatureK: settings.temperatureK[0] + settings.temperatureK[1] * course,
    vapour: settings.vapour[0] + settings.vapour[1] * course,
    co2: settings.co2[0] - settings.co2[1] * course,
    pressurePa: settings.pressurePa,
  };
}

/** What the turbulence of one period must carry. */
export interface DrivenPeriod {
  air: AirMeans;
  zeta: number;
  fluxes: SurfaceFluxes;
  targets: Omit<TurbulenceTargets, 'sampleRateHz' | 'length' | 'cospectra' | 'mode'>;
}

const residualCorrelation = [
  [1, 0.5, -0.5],
  [0.5, 1, -0.6],
  [-0.5, -0.6, 1],
];

/** Least spread of the scalars: temperature [K], vapour [mmol mol⁻¹], CO₂ [µmol mol⁻¹]. */
const floors = { temperature: 0.05, vapour: 0.03, co2: 0.1 };

/**
 * Variances and covariances of one period from its fluxes and mean state.
 *
 * cov(w,T) = H/(ρ c_p), cov(w,χ_v) = E/(M_v n_d), cov(w,χ_c) = F_c/n_d, cov(w,u) = −u*²; σ of a scalar = max(|cov|/(r σ_w), floor)
 * (project choice).
 */
export function drivenPeriod(
  fluxes: SurfaceFluxes,
  means: SlowMeans,
  settings: DriverSettings,
): DrivenPeriod {
  const air = airMeans(
    means.temperatureK,
    means.pressurePa,
    ((means.vapour / 1000) * means.pressurePa) /
      (gasConstant * means.temperatureK * (1 + means.vapour / 1000)),
  );
  const evaporation = fluxes.latentHeat / air.latentHeat;
  const temperatureFlux = fluxes.sensibleHeat / (air.airDensity * air.heatCapacity);
  const zeta = settings.heightM / obukhovLength(fluxes.ustarMs, temperatureFlux, evaporation, air);
  const covariances = {
    u: -(fluxes.ustarMs ** 2),
    temperature: temperatureFlux,
    vapour: (1000 * evaporation) / (molarMassWater * air.dryAirMolarDensity),
    co2: fluxes.co2Flux / air.dryAirMolarDensity,
  };
  const { sigmaW, sigmaU } = windSpread(fluxes.ustarMs, zeta, settings);
  const correlation = settings.scalarCorrelation[zeta < 0 ? 0 : 1];
  const spread = (key: 'temperature' | 'vapour' | 'co2') =>
    Math.max(Math.abs(covariances[key]) / (correlation * sigmaW), floors[key]) ** 2;
  return {
    air,
    zeta,
    fluxes,
    targets: {
      heightM: settings.heightM,
      meanSpeedMs: means.speedMs,
      zeta,
      variances: {
        w: sigmaW ** 2,
        u: sigmaU ** 2,
        v: (0.8 * sigmaU) ** 2,
        temperature: spread('temperature'),
        vapour: spread('vapour'),
        co2: spread('co2'),
      },
      covariances,
      residualCorrelation,
    },
  };
}

function windSpread(
  ustar: number,
  zeta: number,
  settings: DriverSettings,
): { sigmaW: number; sigmaU: number } {
  if (settings.windSpread === 'integral-model' && zeta > -0.2 && zeta < 0.4) {
    const coriolis = Math.abs(2 * 7.2921159e-5 * Math.sin((settings.latitudeDeg * Math.PI) / 180));
    const scale = Math.log(coriolis / ustar);
    return { sigmaW: (0.21 * scale + 3.1) * ustar, sigmaU: (0.44 * scale + 6.3) * ustar };
  }
  const unstable = Math.max(0, -zeta);
  return {
    sigmaW: 1.25 * ustar * (1 + 3 * unstable) ** (1 / 3),
    sigmaU: 2.2 * ustar * (1 + 0.5 * unstable) ** (1 / 3),
  };
}
