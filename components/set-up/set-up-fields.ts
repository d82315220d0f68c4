import type { SetUp } from '../../processing/schemas/set-up';
import { formatNumber } from '../format/numbers';

/** Every field of a set-up: its unit, and why it matters to a flux. The form, the facts and the list of differences read this. */

export interface SetUpFieldText {
  /** Path inside the set-up. */
  path: SetUpPath;
  label: string;
  unit?: string;
  why: string;
  kind: 'number' | 'text' | 'choice';
  /** May stay empty (null). */
  isOptional?: boolean;
  choices?: readonly { value: string; label: string }[];
}

export type SetUpPath =
  | 'latitudeDeg'
  | 'longitudeDeg'
  | 'elevationM'
  | 'canopyHeightM'
  | 'displacementM'
  | 'roughnessM'
  | 'sonicHeightM'
  | 'boomAzimuthDeg'
  | 'azimuthReference'
  | 'magneticDeclinationDeg'
  | 'axes.handedness'
  | 'axes.uTowards'
  | 'sonic.serialNumber'
  | 'sonic.pathLengthM'
  | 'sonic.pathElevationDeg'
  | 'sonic.crosswindDone'
  | 'sonic.acceptanceAngleDeg'
  | 'analyser.serialNumber'
  | 'analyser.pathLengthM'
  | 'analyser.responseTimeS'
  | 'analyser.signalStrengthLimitPercent'
  | 'separation.northM'
  | 'separation.eastM'
  | 'separation.upM'
  | 'sampleRateHz'
  | 'mastSectorHalfWidthDeg';

export interface SetUpGroup {
  key: string;
  title: string;
  intro?: string;
  fields: readonly SetUpFieldText[];
}

const number = (
  path: SetUpPath,
  label: string,
  unit: string | undefined,
  why: string,
  isOptional = false,
): SetUpFieldText => ({
  path,
  label,
  unit,
  why,
  kind: 'number',
  isOptional,
});

export const setUpGroups: readonly SetUpGroup[] = [
  {
    key: 'place',
    title: 'Place',
    fields: [
      number('latitudeDeg', 'Latitude', '°', 'North positive. Tells night from day.'),
      number('longitudeDeg', 'Longitude', '°', 'East positive.'),
      number(
        'elevationM',
        'Elevation of the ground',
        'm',
        'Gives the air pressure where none is recorded; 100 m are about 1.2 % of every density.',
      ),
    ],
  },
  {
    key: 'heights',
    title: 'Heights',
    intro: 'Above ground. They set stability, spectral losses and where the flux comes from.',
    fields: [
      number(
        'canopyHeightM',
        'Canopy height',
        'm',
        'Displacement and roughness follow from it. Correct it as the canopy grows.',
      ),
      number(
        'sonicHeightM',
        'Sonic, middle of its paths',
        'm',
        'Its height above the displacement height scales stability and every spectrum.',
      ),
      number(
        'displacementM',
        'Displacement height',
        'm',
        'Where the wind profile seems to start: two thirds of the canopy is common practice.',
      ),
      number(
        'roughnessM',
        'Roughness length',
        'm',
        'How rough the surface is to the wind: a tenth of the canopy is common practice.',
      ),
    ],
  },
  {
    key: 'directions',
    title: 'Directions',
    intro: 'A wrong azimuth turns every wind direction and moves the sector behind the mast.',
    fields: [
      number(
        'boomAzimuthDeg',
        'Boom points to',
        '°',
        'From the mast to the sensor, clockwise from north. Read the compass away from steel.',
      ),
      {
        path: 'azimuthReference',
        label: 'Counted from',
        kind: 'choice',
        why: 'A compass shows magnetic north; a map or a satellite bearing shows true north.',
        choices: [
          { value: 'true', label: 'true north' },
          { value: 'magnetic', label: 'magnetic north' },
        ],
      },
      number(
        'magneticDeclinationDeg',
        'Declination',
        '°',
        'East positive; added once when the azimuth is magnetic.',
      ),
      number(
        'mastSectorHalfWidthDeg',
        'Behind the mast, each side',
        '°',
        'Wind from there passed the mast first, and its flux is rejected. 0 switches it off.',
      ),
      {
        path: 'axes.uTowards',
        label: 'Positive u points',
        kind: 'choice',
        why: 'With handedness it turns the instrument’s axes into directions.',
        choices: [
          { value: 'mast', label: 'from the sensor to the mast' },
          { value: 'away-from-mast', label: 'away from the mast' },
          { value: 'right-of-boom', label: 'to the right of the boom' },
          { value: 'left-of-boom', label: 'to the left of the boom' },
        ],
      },
      {
        path: 'axes.handedness',
        label: 'Axes are',
        kind: 'choice',
        why: 'Right-handed: w up, v to the left of u seen from above. A wrong choice mirrors the wind direction.',
        choices: [
          { value: 'right', label: 'right-handed' },
          { value: 'left', label: 'left-handed' },
        ],
      },
    ],
  },
  {
    key: 'sonic',
    title: 'Sonic',
    fields: [
      {
        path: 'sonic.serialNumber',
        label: 'Serial number',
        kind: 'text',
        why: 'So that a drift can be traced to one instrument.',
      },
      number(
        'sonic.pathLengthM',
        'Path length',
        'm',
        'Blurs eddies smaller than itself; the spectral correction gives them back.',
      ),
      number(
        'sonic.pathElevationDeg',
        'Paths above the horizontal',
        '°',
        'For the correction of sonic temperature by side wind.',
      ),
      {
        path: 'sonic.crosswindDone',
        label: 'Side wind already corrected',
        kind: 'choice',
        why: 'Done twice or never, the sensible heat flux errs by some per cent in strong wind.',
        choices: [
          { value: 'yes', label: 'yes, by the instrument' },
          { value: 'no', label: 'no' },
          { value: 'unknown', label: 'not known' },
        ],
      },
      number(
        'sonic.acceptanceAngleDeg',
        'Largest angle of attack',
        '°',
        'Steeper wind passes the sonic’s own struts; a share beyond it is flagged.',
      ),
    ],
  },
  {
    key: 'analyser',
    title: 'Gas analyser, open path',
    fields: [
      {
        path: 'analyser.serialNumber',
        label: 'Serial number',
        kind: 'text',
        why: 'So that a calibration can be traced to one instrument.',
      },
      number('analyser.pathLengthM', 'Optical path', 'm', 'Blurs eddies smaller than itself.'),
      number(
        'analyser.responseTimeS',
        'Response time',
        's',
        'First order; 0 for a fast analyser without digital filter.',
      ),
      number(
        'analyser.signalStrengthLimitPercent',
        'Signal strength at least',
        '%',
        'Only where the maker states a limit; else dirt is judged against the last clean days.',
        true,
      ),
      number(
        'separation.northM',
        'From the sonic, north',
        'm',
        'Analyser centre minus sonic centre. Distance decorrelates wind and gas: 0.2 m cost some per cent.',
      ),
      number('separation.eastM', 'From the sonic, east', 'm', 'East positive.'),
      number('separation.upM', 'From the sonic, up', 'm', 'Up positive.'),
    ],
  },
  {
    key: 'recording',
    title: 'Recording',
    fields: [number('sampleRateHz', 'Sampling rate', 'Hz', 'Half an hour at 20 Hz should hold 36 000 rows.')],
  },
];

const byPath = new Map(
  setUpGroups.flatMap((group) => group.fields.map((field) => [field.path, field] as const)),
);

function valueAt(setUp: SetUp, path: SetUpPath): unknown {
  return path
    .split('.')
    .reduce<unknown>((value, key) => (value as Record<string, unknown> | null)?.[key], setUp);
}

/** The value of a field as people read it. */
export function fieldWords(setUp: SetUp, field: SetUpFieldText): string {
  const value = valueAt(setUp, field.path);
  if (value === null || value === undefined || value === '') return 'not stated';
  if (field.kind === 'choice')
    return field.choices?.find((choice) => choice.value === value)?.label ?? String(value);
  if (typeof value === 'number') {
    const decimals = String(value).split('.')[1]?.length ?? 0;
    const text = formatNumber(value, decimals);
    return field.unit === undefined ? text : field.unit === '°' ? `${text}°` : `${text} ${field.unit}`;
  }
  return String(value);
}

export interface SetUpDifference {
  label: string;
  before: string;
  after: string;
}

/** What differs between two revisions, in words; `validFrom` is left to the caller, who knows the clock. */
export function setUpDifferences(before: SetUp, after: SetUp): SetUpDifference[] {
  const differences: SetUpDifference[] = [];
  for (const group of setUpGroups) {
    for (const field of group.fields) {
      if (Object.is(valueAt(before, field.path), valueAt(after, field.path))) continue;
      const known = byPath.get(field.path);
      const label =
        group.key === 'sonic' || group.key === 'analyser'
          ? `${group.title.split(',')[0]}: ${known?.label.toLowerCase() ?? ''}`
          : field.label;
      differences.push({ label, before: fieldWords(before, field), after: fieldWords(after, field) });
    }
  }
  const sectors = (setUp: SetUp): string =>
    setUp.disturbedSectors.length === 0
      ? 'none'
      : setUp.disturbedSectors
          .map(
            (sector) =>
              `${sector.fromDeg}° to ${sector.toDeg}° ${sector.reason} (${sector.grade === 1 ? 'usable' : 'rejected'})`,
          )
          .join('; ');
  if (sectors(before) !== sectors(after))
    differences.push({ label: 'Disturbed sectors', before: sectors(before), after: sectors(after) });
  return differences;
}

/** What a new station's form starts with: no place and no heights, which nobody can guess; ordinary instruments of 20 Hz. */
export function emptySetUp(validFrom: string): SetUp {
  const unknown = null as unknown as number;
  return {
    schema: 'gustbook/set-up/1',
    validFrom,
    latitudeDeg: unknown,
    longitudeDeg: unknown,
    elevationM: unknown,
    canopyHeightM: unknown,
    displacementM: unknown,
    roughnessM: unknown,
    sonicHeightM: unknown,
    boomAzimuthDeg: unknown,
    azimuthReference: 'true',
    magneticDeclinationDeg: 0,
    axes: { handedness: 'right', uTowards: 'mast' },
    sonic: {
      serialNumber: '',
      pathLengthM: unknown,
      pathElevationDeg: 60,
      crosswindDone: 'unknown',
      acceptanceAngleDeg: 45,
    },
    analyser: {
      kind: 'open-path',
      serialNumber: '',
      pathLengthM: unknown,
      responseTimeS: 0,
      signalStrengthLimitPercent: null,
    },
    separation: { northM: unknown, eastM: unknown, upM: 0 },
    sampleRateHz: 20,
    mastSectorHalfWidthDeg: 30,
    disturbedSectors: [],
  };
}

/** A short form for addresses from a name: "Hollin Fen" → "hollin-fen". */
export function slugOf(name: string): string {
  return name
    .normalize('NFKD')
    .replace(/[\u0300-\u036f]/g, '')
    .toLowerCase()
    .replace(/[^a-z0-9]+/g, '-')
    .replace(/^-+|-+$/g, '')
    .slice(0, 40)
    .replace(/-+$/, '');
}
