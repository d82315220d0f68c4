import { z } from 'zod';

/**
 * A station and one dated set-up of its system. Every field says its unit and why it matters to a flux; the forms of the
 * client and the server's validation both read this one schema.
 */

const azimuth = z.number().min(0).max(360);

export const stationSchema = z.object({
  schema: z.literal('gustbook/station/1'),
  name: z.string().trim().min(1).max(80),
  /** Short form used in file names and addresses. */
  slug: z
    .string()
    .regex(/^[a-z0-9]+(-[a-z0-9]+)*$/, 'Use small letters, digits and single hyphens.')
    .min(1)
    .max(40),
  description: z.string().trim().max(500).default(''),
  /** Station standard time minus UTC [min]; fixed, without daylight saving: periods are anchored to it. */
  utcOffsetMinutes: z.number().int().min(-720).max(840),
  /** Set for demonstration data; shown wherever the station is. */
  invented: z.boolean().default(false),
});
export type Station = z.infer<typeof stationSchema>;

export const disturbedSectorSchema = z.object({
  /** Clockwise from → to, true north [deg]; may wrap through 0. */
  fromDeg: azimuth,
  toDeg: azimuth,
  /** 1: usable at best, 2: rejected. */
  grade: z.union([z.literal(1), z.literal(2)]),
  reason: z.string().trim().min(1).max(120),
});

export const setUpSchema = z
  .object({
    schema: z.literal('gustbook/set-up/1'),
    /** First instant this set-up holds, UTC. */
    validFrom: z.iso.datetime(),
    latitudeDeg: z.number().min(-90).max(90),
    longitudeDeg: z.number().min(-180).max(180),
    elevationM: z.number().min(-430).max(6000),
    canopyHeightM: z.number().min(0).max(100),
    displacementM: z.number().min(0).max(100),
    roughnessM: z.number().min(0.00001).max(20),
    /** Above ground [m]. */
    sonicHeightM: z.number().min(0.3).max(200),
    /** Where the boom points, from mast to sensor [deg], counted from `azimuthReference` north. */
    boomAzimuthDeg: azimuth,
    azimuthReference: z.enum(['true', 'magnetic']),
    /** East positive [deg]; applied once when the reference is magnetic. */
    magneticDeclinationDeg: z.number().min(-180).max(180),
    axes: z.object({
      handedness: z.enum(['right', 'left']),
      /** Which way +u points seen from the array. */
      uTowards: z.enum(['mast', 'away-from-mast', 'right-of-boom', 'left-of-boom']),
    }),
    sonic: z.object({
      serialNumber: z.string().trim().max(60).default(''),
      /** Vertical measuring path [m]; blurs small eddies. */
      pathLengthM: z.number().min(0.01).max(0.5),
      /** Elevation of the paths above the horizontal [deg]; for the crosswind option. */
      pathElevationDeg: z.number().min(0).max(90),
      /** Whether the instrument already corrects sonic temperature for side wind. */
      crosswindDone: z.enum(['yes', 'no', 'unknown']),
      /** Largest angle of attack the maker accepts [deg]. */
      acceptanceAngleDeg: z.number().min(5).max(90),
    }),
    analyser: z.object({
      kind: z.literal('open-path'),
      serialNumber: z.string().trim().max(60).default(''),
      /** Optical path [m]. */
      pathLengthM: z.number().min(0.01).max(2),
      /** First-order response time [s]; 0 for a fast open path without digital filter. */
      responseTimeS: z.number().min(0).max(5),
      /** Absolute lower limit of signal strength [%], only where the maker states one. */
      signalStrengthLimitPercent: z.number().min(0).max(100).nullable(),
    }),
    /** Analyser centre minus sonic centre [m], in geographic axes. */
    separation: z.object({
      northM: z.number().min(-5).max(5),
      eastM: z.number().min(-5).max(5),
      upM: z.number().min(-5).max(5),
    }),
    sampleRateHz: z.number().min(1).max(100),
    /** Half-width of the sector behind the mast [deg]; 0 switches it off. */
    mastSectorHalfWidthDeg: z.number().min(0).max(90),
    disturbedSectors: z.array(disturbedSectorSchema).max(24),
  })
  .refine((s) => s.sonicHeightM > s.displacementM, {
    path: ['sonicHeightM'],
    message: 'The sonic must stand above the displacement height.',
  })
  .refine((s) => s.displacementM <= s.canopyHeightM || s.canopyHeightM === 0, {
    path: ['displacementM'],
    message: 'Displacement height is normally below the canopy top.',
  });
export type SetUp = z.infer<typeof setUpSchema>;

/** Displacement height suggested from the canopy [m]: 2/3 of its height (common practice; project default). */
export function suggestDisplacementM(canopyHeightM: number): number {
  return Math.round(((2 / 3) * canopyHeightM + Number.EPSILON) * 1000) / 1000;
}

/** Roughness length suggested from the canopy [m]: a tenth of its height, at least 1 mm (common practice; project default). */
export function suggestRoughnessM(canopyHeightM: number): number {
  return Math.max(0.001, Math.round(0.1 * canopyHeightM * 10000) / 10000);
}

/** True azimuth of the boom [deg, 0–360). */
export function trueBoomAzimuthDeg(
  setUp: Pick<SetUp, 'boomAzimuthDeg' | 'azimuthReference' | 'magneticDeclinationDeg'>,
): number {
  const shift = setUp.azimuthReference === 'magnetic' ? setUp.magneticDeclinationDeg : 0;
  return (((setUp.boomAzimuthDeg + shift) % 360) + 360) % 360;
}
