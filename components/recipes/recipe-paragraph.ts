import { defaultRecipe } from '../../processing/schemas/recipe';
import type { RecipeSettings } from '../../processing/schemas/recipe';
import { formatNumber } from '../format/numbers';

/**
 * A recipe as the methods paragraph of a paper: sentences with the settings in their places. The page edits the values where they
 * stand, and the list of differences names them by their sentence.
 */

export interface ValuePart {
  /** Path in the settings: `despiking.threshold`. */
  path: string;
  /** What the value is, for those who hear it alone and for the list of differences. */
  label: string;
  unit?: string;
  choices?: readonly { value: string; label: string }[];
  /** The limit can be switched off (null); the word that then stands there. */
  offWord?: string;
}

export type Part = string | ValuePart;

export interface RecipeParagraph {
  key: string;
  title: string;
  /** Why this is done, in a sentence. */
  why: string;
  parts: Part[];
}

type Settings = RecipeSettings;

const value = (path: string, label: string, unit?: string, offWord?: string): ValuePart => ({
  path,
  label,
  unit,
  offWord,
});
const choice = (path: string, label: string, choices: ValuePart['choices']): ValuePart => ({
  path,
  label,
  choices,
});

/** The settings in words; sentences that a method does not need are left out. */
export function recipeParagraphs(settings: Settings): RecipeParagraph[] {
  return [
    {
      key: 'averaging',
      title: 'Averaging and completeness',
      why: 'A half hour with holes measured a shorter, different period.',
      parts: [
        'Fluxes are averaged over ',
        choice(
          'averaging.minutes',
          'averaging period',
          [10, 15, 30, 60].map((minutes) => ({ value: String(minutes), label: `${minutes} min` })),
        ),
        '. A period with more than ',
        value('completeness.softMissingPercent', 'missing samples, usable at best above', '%'),
        ' of its samples missing is usable at best, with more than ',
        value('completeness.hardMissingPercent', 'missing samples, not processed above', '%'),
        ' it is not processed.',
      ],
    },
    {
      key: 'diagnostics',
      title: 'Instrument status',
      why: 'Rain, ice and dirty windows: the instruments often know it themselves.',
      parts: [
        'Samples that an instrument calls bad are missing; more than ',
        value('diagnostics.softRejectedPercent', 'bad status, usable at best above', '%'),
        ' of them make a period usable at best, more than ',
        value('diagnostics.hardRejectedPercent', 'bad status, rejected above', '%'),
        ' reject it. Gas samples are dropped when signal strength falls ',
        value('diagnostics.signalStrength.relativeDropPoints', 'drop of signal strength', 'points', 'never'),
        ' below the ',
        value(
          'diagnostics.signalStrength.referencePercentile',
          'percentile of the clean reference',
          'th percentile',
        ),
        ' of the last ',
        value('diagnostics.signalStrength.referenceDays', 'days of the clean reference', 'days'),
        '; an absolute limit in the set-up is ',
        choice('diagnostics.signalStrength.useAbsoluteLimit', 'absolute limit of signal strength', [
          { value: 'true', label: 'used' },
          { value: 'false', label: 'not used' },
        ]),
        '.',
      ],
    },
    {
      key: 'plausibility',
      title: 'Plausibility',
      why: 'Values that no air can have are missing, not clipped.',
      parts: [
        'Values are kept within ± ',
        value('plausibility.horizontalWindMaxMs', 'horizontal wind at most', 'm s-1'),
        ' for u and v, ± ',
        value('plausibility.verticalWindMaxMs', 'vertical wind at most', 'm s-1'),
        ' for w, ',
        value('plausibility.sonicTemperatureDegC.low', 'sonic temperature at least', '°C'),
        ' to ',
        value('plausibility.sonicTemperatureDegC.high', 'sonic temperature at most', '°C'),
        ' for sonic temperature, ',
        value('plausibility.co2MoleFraction.low', 'CO2 at least'),
        ' to ',
        value('plausibility.co2MoleFraction.high', 'CO2 at most', 'µmol mol-1'),
        ' for CO2, ',
        value('plausibility.h2oMoleFraction.low', 'H2O at least'),
        ' to ',
        value('plausibility.h2oMoleFraction.high', 'H2O at most', 'mmol mol-1'),
        ' for H2O and ',
        value('plausibility.airPressureKPa.low', 'air pressure at least'),
        ' to ',
        value('plausibility.airPressureKPa.high', 'air pressure at most', 'kPa'),
        ' for air pressure; more than ',
        value('plausibility.hardRemovedPercent', 'implausible samples, hard flag above', '%'),
        ' removed raise the hard flag.',
      ],
    },
    {
      key: 'despiking',
      title: 'Despiking',
      why: 'A spike is lonely; a gust has neighbours. The median is not moved by the spike it looks for.',
      parts: [
        'Spikes are ',
        choice('despiking.method', 'despiking', [
          { value: 'median-mad', label: 'found by median/MAD' },
          { value: 'none', label: 'not looked for' },
        ]),
        ...(settings.despiking.method === 'median-mad'
          ? [
              ' at ',
              value('despiking.threshold', 'spikes beyond', 'robust standard deviations'),
              ' from the median, ',
              choice('despiking.detrendFirst', 'detrending before despiking', [
                { value: 'false', label: 'without detrending first' },
                { value: 'true', label: 'after linear detrending' },
              ]),
              ', and left as gaps',
            ]
          : []),
        '.',
      ],
    },
    {
      key: 'screening',
      title: 'Screening tests',
      why: 'Vickers & Mahrt 1997: records that look wrong in shape, whatever their size.',
      parts: [
        'Records are flagged soft or hard by the share of spikes (hard above ',
        value('screening.spikeSharePercent.hard', 'spikes, hard above', '%', 'never'),
        '), amplitude resolution (empty bins, hard above ',
        value('screening.amplitudeResolution.emptyPercent.hard', 'empty bins, hard above', '%', 'never'),
        '), dropouts (runs of ',
        value('screening.dropouts.interiorPercent.hard', 'run in one bin, hard above', '%', 'never'),
        ' within, ',
        value('screening.dropouts.extremePercent.hard', 'run in an extreme bin, hard above', '%', 'never'),
        ' at the extremes), skewness (soft outside ',
        value('screening.skewness.soft.low', 'skewness, soft below'),
        ' to ',
        value('screening.skewness.soft.high', 'skewness, soft above'),
        ', hard outside ',
        value('screening.skewness.hard.low', 'skewness, hard below'),
        ' to ',
        value('screening.skewness.hard.high', 'skewness, hard above'),
        '), kurtosis (soft outside ',
        value('screening.kurtosis.soft.low', 'kurtosis, soft below'),
        ' to ',
        value('screening.kurtosis.soft.high', 'kurtosis, soft above'),
        ', hard outside ',
        value('screening.kurtosis.hard.low', 'kurtosis, hard below'),
        ' to ',
        value('screening.kurtosis.hard.high', 'kurtosis, hard above'),
        '), steps in mean (soft ',
        value('screening.discontinuities.mean.soft', 'step in the mean, soft above', undefined, 'never'),
        ', hard ',
        value('screening.discontinuities.mean.hard', 'step in the mean, hard above', undefined, 'never'),
        ') and variance (soft ',
        value(
          'screening.discontinuities.variance.soft',
          'step in the variance, soft above',
          undefined,
          'never',
        ),
        ', hard ',
        value(
          'screening.discontinuities.variance.hard',
          'step in the variance, hard above',
          undefined,
          'never',
        ),
        '), the covariance gained by lag (soft ',
        value('screening.lag.differencePercent.soft', 'covariance gained by lag, soft above', '%', 'never'),
        ', hard ',
        value('screening.lag.differencePercent.hard', 'covariance gained by lag, hard above', '%', 'never'),
        '), angle of attack (soft ',
        value('screening.angleOfAttack.sharePercent.soft', 'steep samples, soft above', '%', 'never'),
        ', hard ',
        value('screening.angleOfAttack.sharePercent.hard', 'steep samples, hard above', '%', 'never'),
        ') and wind nonstationarity (soft ',
        value(
          'screening.windNonstationarity.ratio.soft',
          'wind nonstationarity, soft above',
          undefined,
          'never',
        ),
        '). A soft flag means grade ',
        choice('screening.softGrade', 'grade of a soft flag', grades),
        ', a hard one ',
        choice('screening.hardGrade', 'grade of a hard flag', grades),
        '.',
      ],
    },
    {
      key: 'geometry',
      title: 'Axes and lag',
      why: 'A leaning sonic mistakes horizontal gusts for vertical ones; the gas arrives late. Double rotation keeps roll and the sonic’s own offset in w.',
      parts: [
        'Side wind in sonic temperature is corrected ',
        choice('crosswind.method', 'side-wind correction', [
          { value: 'as-set-up', label: 'as the set-up says' },
          { value: 'off', label: 'not at all' },
        ]),
        '. Wind from behind the mast is ',
        choice('sectors.useMastSector', 'sector behind the mast', [
          { value: 'true', label: 'rejected' },
          { value: 'false', label: 'kept' },
        ]),
        ', listed disturbed sectors are ',
        choice('sectors.useListedSectors', 'listed disturbed sectors', [
          { value: 'true', label: 'graded as listed' },
          { value: 'false', label: 'ignored' },
        ]),
        '. Axes follow double rotation; fluctuations are departures from the block mean. Lags of the gases maximise the covariance within ± ',
        value('lag.windowS', 'lag window', 's'),
        ' when its maximum exceeds ',
        value('lag.noiseFactor', 'covariance over noise at least', 'times the noise'),
        ', else the expected lag is used.',
      ],
    },
    {
      key: 'corrections',
      title: 'Corrections',
      why: 'Small and large eddies are lost to paths, separation and the finite period; warm, moist air dilutes the gas.',
      parts: [
        'Spectral losses are ',
        choice('spectralLoss.method', 'spectral losses', [
          { value: 'transfer-functions', label: 'corrected by transfer functions' },
          { value: 'none', label: 'not corrected' },
        ]),
        ...(settings.spectralLoss.method === 'transfer-functions'
          ? [
              ' (',
              choice('spectralLoss.blockAverage', 'block average', withOrWithout('block average')),
              ', ',
              choice('spectralLoss.pathAveraging', 'path averaging', withOrWithout('path averaging')),
              ', ',
              choice('spectralLoss.separation', 'separation', withOrWithout('separation')),
              ', response time in its ',
              choice('spectralLoss.responseTime', 'form of the response time', [
                { value: 'exact', label: 'exact form' },
                { value: 'square-root', label: 'square-root form' },
              ]),
              '); a factor above ',
              value('spectralLoss.warnFactor', 'spectral factor, doubtful above'),
              ' is doubtful, above ',
              value('spectralLoss.rejectFactor', 'spectral factor, refused above'),
              ' refused',
            ]
          : []),
        '. Density terms are coupled with the corrected covariances (Webb et al. 1980). Saturation vapour pressure follows ',
        choice('saturationVapourPressure', 'saturation vapour pressure', [
          { value: 'sonntag-1990', label: 'Sonntag 1990' },
          { value: 'wmo-8', label: 'WMO-No. 8' },
          { value: 'fao-56', label: 'FAO-56' },
        ]),
        '. Stability is iterated up to ',
        value('stabilityIteration.maxPasses', 'passes of the stability iteration', 'passes'),
        ', until z/L changes by less than ',
        value('stabilityIteration.relativeChange', 'relative change of z/L'),
        ' of itself or ',
        value('stabilityIteration.absoluteChange', 'absolute change of z/L'),
        '.',
      ],
    },
    {
      key: 'tests',
      title: 'Tests and grades',
      why: 'Six short answers should agree with one long answer, and turbulence should have the size that its model expects.',
      parts: [
        'Steady state compares ',
        value('steadyState.subIntervals', 'short intervals of the steady-state test', 'short covariances'),
        ' with the whole: good up to ',
        value('steadyState.goodPercent', 'steady state, good up to', '%'),
        ', rejected above ',
        value('steadyState.usablePercent', 'steady state, rejected above', '%'),
        '. Developed turbulence is good within ',
        value('integralTurbulence.goodPercent', 'developed turbulence, good up to', '%'),
        ' of its model, rejected above ',
        value('integralTurbulence.usablePercent', 'developed turbulence, rejected above', '%'),
        '. Random uncertainty follows Finkelstein & Sims 2001 with lags up to ',
        value('uncertainty.maxLagS', 'lags of the random uncertainty', 's'),
        '. Storage is ',
        choice('storage.method', 'storage', [
          { value: 'single-level', label: 'computed from one level' },
          { value: 'none', label: 'not computed' },
        ]),
        ...(settings.storage.method === 'single-level'
          ? [
              ' from the ',
              value('storage.edgeMinutes', 'minutes around each end for storage', 'min'),
              ' around each end',
            ]
          : []),
        '.',
      ],
    },
  ];
}

const grades: ValuePart['choices'] = [
  { value: '0', label: '0 good' },
  { value: '1', label: '1 usable' },
  { value: '2', label: '2 rejected' },
];

function withOrWithout(what: string): ValuePart['choices'] {
  return [
    { value: 'true', label: `with ${what}` },
    { value: 'false', label: `without ${what}` },
  ];
}

export function settingAt(settings: Settings, path: string): unknown {
  return path
    .split('.')
    .reduce<unknown>((at, key) => (at as Record<string, unknown> | undefined)?.[key], settings);
}

/** The value as it stands in its sentence. */
export function partWords(settings: Settings, part: ValuePart): string {
  const at = settingAt(settings, part.path);
  if (at === null || at === undefined) return part.offWord ?? 'off';
  if (part.choices)
    return part.choices.find((candidate) => candidate.value === String(at))?.label ?? String(at);
  const number = Number(at);
  const decimals = String(number).split('.')[1]?.length ?? 0;
  const text = formatNumber(number, decimals);
  return part.unit === undefined
    ? text
    : part.unit === 'th percentile'
      ? `${text}th percentile`
      : `${text} ${part.unit}`;
}

function withValue(target: unknown, keys: readonly string[], value: unknown): unknown {
  const [key, ...rest] = keys;
  if (key === undefined) return value;
  const record = target as Record<string, unknown>;
  return { ...record, [key]: withValue(record[key], rest, value) };
}

/** The settings with one value changed; a changed method brings its own usual settings. */
export function changeSetting(settings: Settings, part: ValuePart, text: string | number | null): Settings {
  const keys = part.path.split('.');
  const before = settingAt(settings, part.path);
  let next: unknown = text;
  if (part.choices) {
    if (typeof before === 'boolean') next = text === 'true';
    else if (typeof before === 'number') next = Number(text);
  }
  if (keys.at(-1) === 'method') {
    const block = keys[0] as keyof Settings;
    const usual = defaultRecipe.settings[block] as { method?: string };
    const replaced = usual.method === next ? usual : { method: next };
    return { ...settings, [block]: replaced } as Settings;
  }
  return withValue(settings, keys, next) as Settings;
}

export interface RecipeDifference {
  path: string;
  label: string;
  before: string;
  after: string;
}

/** What differs between two recipes' settings, in the order of the paragraph. */
export function recipeDifferences(before: Settings, after: Settings): RecipeDifference[] {
  const parts = new Map<string, ValuePart>();
  for (const settings of [before, after]) {
    for (const paragraph of recipeParagraphs(settings)) {
      for (const part of paragraph.parts) if (typeof part !== 'string') parts.set(part.path, part);
    }
  }
  const differences: RecipeDifference[] = [];
  const seen = new Set<string>();
  for (const part of parts.values()) {
    seen.add(part.path);
    if (Object.is(settingAt(before, part.path), settingAt(after, part.path))) continue;
    const words = (settings: Settings): string =>
      settingAt(settings, part.path) === undefined ? 'does not apply' : partWords(settings, part);
    differences.push({ path: part.path, label: part.label, before: words(before), after: words(after) });
  }
  // settings that the paragraph leaves out must not differ in silence
  for (const path of new Set([...leaves(before), ...leaves(after)])) {
    if (seen.has(path) || Object.is(settingAt(before, path), settingAt(after, path))) continue;
    const raw = (settings: Settings): string => {
      const at = settingAt(settings, path);
      return at === null ? 'off' : at === undefined ? 'does not apply' : String(at);
    };
    differences.push({ path, label: path, before: raw(before), after: raw(after) });
  }
  return differences;
}

function leaves(value: unknown, prefix = ''): string[] {
  if (value === null || typeof value !== 'object') return [prefix];
  return Object.entries(value as Record<string, unknown>).flatMap(([key, member]) =>
    leaves(member, prefix === '' ? key : `${prefix}.${key}`),
  );
}

/** The whole methods text, for a paper. */
export function methodsText(settings: Settings): string {
  return recipeParagraphs(settings)
    .map((paragraph) =>
      paragraph.parts.map((part) => (typeof part === 'string' ? part : partWords(settings, part))).join(''),
    )
    .join(' ');
}
