import { z } from 'zod';
import { contentHash } from '../canonical';

/**
 * A recipe: a complete, immutable choice of processing settings. It holds no facts of one station. Each step has one block; a step
 * with several methods is a union over `method`, so that a further method is one more member.
 */

const limit = z.number();
const percent = z.number().min(0).max(100);

/** Soft and hard limit of a screening test; null switches that limit off. */
const softHard = z.object({ soft: limit.nullable(), hard: limit.nullable() });
const band = z.object({ low: limit, high: limit });

export const recipeSettingsSchema = z.object({
  schema: z.literal('gustbook/recipe/1'),
  averaging: z.object({ minutes: z.union([z.literal(10), z.literal(15), z.literal(30), z.literal(60)]) }),
  completeness: z.object({
    /** Missing share above which a period is usable at best [%]. */
    softMissingPercent: percent,
    /** Missing share above which a period is not processed [%]. */
    hardMissingPercent: percent,
  }),
  diagnostics: z.object({
    softRejectedPercent: percent,
    hardRejectedPercent: percent,
    signalStrength: z.object({
      /** Points below the running reference at which samples are dropped [percentage points]; null: off. */
      relativeDropPoints: z.number().min(0).max(100).nullable(),
      referenceDays: z.number().min(1).max(60),
      referencePercentile: z.number().min(50).max(100),
      /** Used only where the set-up states an absolute limit. */
      useAbsoluteLimit: z.boolean(),
    }),
  }),
  plausibility: z.object({
    horizontalWindMaxMs: z.number().positive(),
    verticalWindMaxMs: z.number().positive(),
    sonicTemperatureDegC: band,
    /** Moist mole fraction [µmol mol⁻¹]. */
    co2MoleFraction: band,
    /** Moist mole fraction [mmol mol⁻¹]. */
    h2oMoleFraction: band,
    airPressureKPa: band,
    /** Removed share above which the hard flag comes [%]; soft above 0. */
    hardRemovedPercent: percent,
  }),
  despiking: z.discriminatedUnion('method', [
    z.object({ method: z.literal('none') }),
    z.object({
      method: z.literal('median-mad'),
      /** Distance from the median in Gaussian-equivalent standard deviations. */
      threshold: z.number().positive(),
      detrendFirst: z.boolean(),
    }),
  ]),
  screening: z.object({
    spikeSharePercent: softHard,
    amplitudeResolution: z.object({
      windowPoints: z.number().int().min(100),
      bins: z.number().int().min(10).max(1000),
      emptyPercent: softHard,
    }),
    dropouts: z.object({ interiorPercent: softHard, extremePercent: softHard }),
    skewness: z.object({ soft: band, hard: band }),
    kurtosis: z.object({ soft: band, hard: band }),
    discontinuities: z.object({ windowS: z.number().positive(), mean: softHard, variance: softHard }),
    lag: z.object({ windowS: z.number().positive(), differencePercent: softHard }),
    angleOfAttack: z.object({ sharePercent: softHard }),
    windNonstationarity: z.object({ ratio: softHard }),
    /** Grade a soft or hard flag leads to. */
    softGrade: z.union([z.literal(0), z.literal(1), z.literal(2)]),
    hardGrade: z.union([z.literal(0), z.literal(1), z.literal(2)]),
  }),
  crosswind: z.discriminatedUnion('method', [
    z.object({ method: z.literal('as-set-up') }),
    z.object({ method: z.literal('off') }),
  ]),
  sectors: z.object({ useMastSector: z.boolean(), useListedSectors: z.boolean() }),
  tilt: z.discriminatedUnion('method', [z.object({ method: z.literal('double-rotation') })]),
  detrending: z.discriminatedUnion('method', [z.object({ method: z.literal('block-mean') })]),
  lag: z.discriminatedUnion('method', [
    z.object({
      method: z.literal('covariance-maximisation'),
      /** Half-width of the window around the expected lag, at least [s]. */
      windowS: z.number().positive().max(30),
      /** |cov| at the maximum must exceed this many times the noise level, else the default lag is used. */
      noiseFactor: z.number().min(0),
    }),
  ]),
  spectralLoss: z.discriminatedUnion('method', [
    z.object({ method: z.literal('none') }),
    z.object({
      method: z.literal('transfer-functions'),
      blockAverage: z.boolean(),
      pathAveraging: z.boolean(),
      separation: z.boolean(),
      responseTime: z.enum(['exact', 'square-root']),
      /** Below this the factor is doubtful, above that it is refused. */
      warnFactor: z.number().min(1),
      rejectFactor: z.number().min(1),
    }),
  ]),
  density: z.discriminatedUnion('method', [z.object({ method: z.literal('coupled-covariances') })]),
  saturationVapourPressure: z.enum(['sonntag-1990', 'wmo-8', 'fao-56']),
  stabilityIteration: z.object({
    maxPasses: z.number().int().min(1).max(50),
    relativeChange: z.number().positive(),
    absoluteChange: z.number().positive(),
  }),
  steadyState: z.object({
    subIntervals: z.number().int().min(2).max(30),
    goodPercent: z.number(),
    usablePercent: z.number(),
  }),
  integralTurbulence: z.object({ goodPercent: z.number(), usablePercent: z.number() }),
  uncertainty: z.object({ method: z.literal('finkelstein-sims'), maxLagS: z.number().positive() }),
  storage: z.discriminatedUnion('method', [
    z.object({ method: z.literal('none') }),
    z.object({ method: z.literal('single-level'), edgeMinutes: z.number().positive().max(5) }),
  ]),
});
export type RecipeSettings = z.infer<typeof recipeSettingsSchema>;

export const recipeSchema = z.object({
  name: z.string().trim().min(1).max(80),
  /** Hash of the recipe it was made from, or null. */
  parentHash: z
    .string()
    .regex(/^[0-9a-f]{64}$/)
    .nullable(),
  settings: recipeSettingsSchema,
});
export type Recipe = z.infer<typeof recipeSchema>;

/** A recipe is known by the hash of its settings: two recipes of other names that compute the same have the same hash. */
export function recipeHash(recipe: Pick<Recipe, 'settings'>): string {
  return contentHash(recipe.settings);
}

/** The default chain for an open-path station; sources and tags of each number stand in `processing/defaults.ts`. */
export const defaultRecipe: Recipe = {
  name: 'Standard open path',
  parentHash: null,
  settings: {
    schema: 'gustbook/recipe/1',
    averaging: { minutes: 30 },
    completeness: { softMissingPercent: 10, hardMissingPercent: 50 },
    diagnostics: {
      softRejectedPercent: 10,
      hardRejectedPercent: 30,
      signalStrength: {
        relativeDropPoints: 10,
        referenceDays: 7,
        referencePercentile: 95,
        useAbsoluteLimit: true,
      },
    },
    plausibility: {
      horizontalWindMaxMs: 50,
      verticalWindMaxMs: 10,
      sonicTemperatureDegC: { low: -40, high: 60 },
      co2MoleFraction: { low: 150, high: 1500 },
      h2oMoleFraction: { low: -1, high: 60 },
      airPressureKPa: { low: 50, high: 110 },
      hardRemovedPercent: 1,
    },
    despiking: { method: 'median-mad', threshold: 7, detrendFirst: false },
    screening: {
      spikeSharePercent: { soft: null, hard: 1 },
      amplitudeResolution: { windowPoints: 1000, bins: 100, emptyPercent: { soft: null, hard: 70 } },
      dropouts: { interiorPercent: { soft: null, hard: 10 }, extremePercent: { soft: null, hard: 6 } },
      skewness: { soft: { low: -1, high: 1 }, hard: { low: -2, high: 2 } },
      kurtosis: { soft: { low: 2, high: 5 }, hard: { low: 1, high: 8 } },
      discontinuities: { windowS: 300, mean: { soft: 2, hard: 3 }, variance: { soft: 2, hard: 3 } },
      lag: { windowS: 2, differencePercent: { soft: 30, hard: null } },
      angleOfAttack: { sharePercent: { soft: 5, hard: 20 } },
      windNonstationarity: { ratio: { soft: 0.5, hard: null } },
      softGrade: 1,
      hardGrade: 2,
    },
    crosswind: { method: 'as-set-up' },
    sectors: { useMastSector: true, useListedSectors: true },
    tilt: { method: 'double-rotation' },
    detrending: { method: 'block-mean' },
    lag: { method: 'covariance-maximisation', windowS: 1, noiseFactor: 3 },
    spectralLoss: {
      method: 'transfer-functions',
      blockAverage: true,
      pathAveraging: true,
      separation: true,
      responseTime: 'exact',
      warnFactor: 2,
      rejectFactor: 5,
    },
    density: { method: 'coupled-covariances' },
    saturationVapourPressure: 'sonntag-1990',
    stabilityIteration: { maxPasses: 10, relativeChange: 0.01, absoluteChange: 0.001 },
    steadyState: { subIntervals: 6, goodPercent: 30, usablePercent: 100 },
    integralTurbulence: { goodPercent: 30, usablePercent: 100 },
    uncertainty: { method: 'finkelstein-sims', maxLagS: 200 },
    storage: { method: 'single-level', edgeMinutes: 5 },
  },
};
