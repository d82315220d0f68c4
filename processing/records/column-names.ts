import { channelUnits } from '../schemas/layout';
import type { ChannelKey } from '../schemas/layout';

/** The vocabulary of headers: ordinary spellings of quantities and of units, none of them special to one instrument. */

export interface NameReading {
  channel: ChannelKey;
  /** `weak`: the word alone could mean something else ("t", "p", "x"). */
  strength: 'strong' | 'weak';
  /** What the name says about how a gas was measured, or that a temperature is a speed of sound. */
  measure:
    | 'mass-density'
    | 'molar-density'
    | 'density'
    | 'mole-fraction'
    | 'dry-mole-fraction'
    | 'speed-of-sound'
    | null;
  /** Unit written in brackets or as a suffix. */
  unitText: string | null;
  /** Status columns: which instrument; null when the name does not say. */
  instrument: 'sonic' | 'analyser' | null;
  /** Signal strength: the name says that higher is dirtier. */
  isFouling: boolean;
}

export interface TimeNameReading {
  role:
    | 'stamp'
    | 'date'
    | 'clock'
    | 'year'
    | 'month'
    | 'day-of-month'
    | 'day-of-year'
    | 'hhmm'
    | 'hour'
    | 'minute'
    | 'second'
    | 'seconds-of-day'
    | 'epoch'
    | 'elapsed'
    | 'counter';
}

/** Unit suffixes as they occur in names, longest first; the value is the unit text they stand for. */
const unitSuffixes: readonly (readonly [readonly string[], string])[] = [
  [['m', 's', '1'], 'm s-1'],
  [['m', 's'], 'm s-1'],
  [['ms1'], 'm s-1'],
  [['ms'], 'm s-1'],
  [['mps'], 'm s-1'],
  [['cms'], 'cm s-1'],
  [['cm', 's'], 'cm s-1'],
  [['kmh'], 'km h-1'],
  [['km', 'h'], 'km h-1'],
  [['mmol', 'm3'], 'mmol m-3'],
  [['mmolm3'], 'mmol m-3'],
  [['mmol', 'mol'], 'mmol mol-1'],
  [['mmolmol'], 'mmol mol-1'],
  [['umol', 'm3'], 'umol m-3'],
  [['umol', 'mol'], 'umol mol-1'],
  [['umolmol'], 'umol mol-1'],
  [['mol', 'm3'], 'mol m-3'],
  [['mg', 'm3'], 'mg m-3'],
  [['mgm3'], 'mg m-3'],
  [['g', 'm3'], 'g m-3'],
  [['gm3'], 'g m-3'],
  [['ppmv'], 'ppm'],
  [['ppm'], 'ppm'],
  [['ppt'], 'ppt'],
  [['deg', 'c'], 'degC'],
  [['degc'], 'degC'],
  [['celsius'], 'degC'],
  [['kelvin'], 'K'],
  [['hpa'], 'hPa'],
  [['kpa'], 'kPa'],
  [['mbar'], 'hPa'],
  [['pct'], '%'],
  [['percent'], '%'],
  [['c'], 'degC'],
  [['k'], 'K'],
  [['pa'], 'Pa'],
];

const noiseWords = new Set([
  'raw',
  'inst',
  'instant',
  'hf',
  'fast',
  'ec',
  'eddy',
  'val',
  'value',
  'meas',
  'measured',
  '5hz',
  '10hz',
  '20hz',
  '25hz',
  '50hz',
]);
/** Words that say the column is a statistic or another thing than the air. */
const foreignWords = new Set([
  'std',
  'stdev',
  'sd',
  'var',
  'variance',
  'cov',
  'min',
  'max',
  'sigma',
  'cell',
  'ref',
  'reference',
  'cooler',
  'motor',
  'volt',
  'volts',
  'voltage',
  'mv',
  'battery',
  'batt',
  'panel',
  'case',
  'rh',
  'absorptance',
  'soil',
  'dew',
  'dewpoint',
]);

const words = (text: string): ReadonlySet<string> => new Set(text.split(' '));

const strongNames: Partial<Record<ChannelKey, ReadonlySet<string>>> = {
  windU: words(
    'u ux windu uwind windx xwind uvel velu velx usonic sonicu uson sonu sonicx ucomponent componentu windcompu windcomponentu windspeedu uwindspeed uspeed windux windspeedx',
  ),
  windV: words(
    'v vy uy windv vwind windy ywind vvel velv vely vsonic sonicv vson sonv sonicy vcomponent componentv windcompv windcomponentv windspeedv vwindspeed vspeed winduy windspeedy',
  ),
  windW: words(
    'w uz windw wwind windz zwind wvel velw velz wsonic sonicw wson sonw sonicz wcomponent componentw windcompw windcomponentw windspeedw wwindspeed wspeed winduz windspeedz verticalwind windvertical vertwind windvert verticalvelocity verticalwindspeed wvertical wvert',
  ),
  sonicTemperature: words(
    'ts tsonic sonict sonictemp sonictemperature tson sont tempsonic temperaturesonic tempson acoustictemperature acoustictemp tacoustic tv tvirtual virtualtemperature virttemp sos speedofsound soundspeed csound',
  ),
  airTemperature: words(
    'ta tair airt airtemp airtemperature temperatureair tempair tamb tambient ambienttemperature ambienttemp',
  ),
  co2: words('co2 rhoc rhoco2 co2rho cco2 carbondioxide xco2 chico2 co2x qco2'),
  h2o: words(
    'h2o rhov rhoh2o rhowv h2orho q wv watervapour watervapor vapour vapor ah absolutehumidity abshumidity humidityabs xh2o chih2o ch2o qv',
  ),
  airPressure: words(
    'press pressure pair airpressure airpress pressureair pressair patm atmosphericpressure baro barometer barometric barometricpressure baropressure pamb ambientpressure ambientpress pbaro',
  ),
};

const weakNames: Partial<Record<ChannelKey, ReadonlySet<string>>> = {
  windU: words('x wx wind1 u1 vx'),
  windV: words('y wy wind2 v1'),
  windW: words('z wz wind3 w1 vz'),
  sonicTemperature: words('t temp temperature'),
  co2: words('c'),
  h2o: words('humidity water e'),
  airPressure: words('p pa bp'),
};

const gasMeasureWords: Readonly<Record<string, NameReading['measure']>> = {
  density: 'density',
  dens: 'density',
  conc: 'density',
  concentration: 'density',
  mass: 'mass-density',
  massdensity: 'mass-density',
  molar: 'molar-density',
  molardensity: 'molar-density',
  molefraction: 'mole-fraction',
  mole: 'mole-fraction',
  fraction: 'mole-fraction',
  mf: 'mole-fraction',
  wet: 'mole-fraction',
  dry: 'dry-mole-fraction',
  mixing: 'dry-mole-fraction',
  ratio: 'dry-mole-fraction',
  mixingratio: 'dry-mole-fraction',
  mr: 'dry-mole-fraction',
};

const statusWords = words(
  'status stat diag diagnostic diagnostics flag error err errorcode statuscode diagnosticcode',
);
const sonicWords = words('sonic son anemometer anem wind sa');
const analyserWords = words('gas irga analyser analyzer analysator co2 h2o ga');
const signalWords = words(
  'signal strength sig rssi signalstrength sigstrength sigstr window windowclean clean cleanliness',
);
const foulingWords = words('fouling dirt dirtiness dirty contamination');

/** Text in brackets, or null. */
function bracketed(name: string): string | null {
  const match = /[[({<]([^\])}>]*)[\])}>]/.exec(name);
  return match?.[1]?.trim() || null;
}

function wordsOf(name: string): string[] {
  return name
    .replace(/[[({<][^\])}>]*[\])}>]/g, ' ')
    .replace(/₂/g, '2')
    .replace(/[µμ]/g, 'u')
    .replace(/°/g, 'deg')
    .replace(/([kh])Pa/g, '$1pa')
    .replace(/([a-z])([A-Z])/g, '$1 $2')
    .toLowerCase()
    .split(/[^a-z0-9]+/)
    .filter((word) => word !== '');
}

/** Splits a unit suffix off the words of a name; a suffix never takes the last word that is left. */
function splitSuffix(all: readonly string[]): { rest: string[]; unitText: string | null } {
  for (const [suffix, unit] of unitSuffixes) {
    const start = all.length - suffix.length;
    if (start < 1) continue;
    if (suffix.every((word, index) => all[start + index] === word))
      return { rest: all.slice(0, start), unitText: unit };
  }
  return { rest: [...all], unitText: null };
}

/** What the name of a column says about the quantity it holds; null when it says nothing. */
export function readName(name: string): NameReading | null {
  const all = wordsOf(name).filter((word) => !noiseWords.has(word));
  if (all.length === 0 || all.some((word) => foreignWords.has(word))) return null;
  const inBrackets = bracketed(name);
  const split = splitSuffix(all);
  const unitText = inBrackets ?? split.unitText;
  const none = { measure: null, unitText, instrument: null, isFouling: false } as const;

  if (all.some((word) => statusWords.has(word))) {
    const isSonic = all.some((word) => sonicWords.has(word));
    const isAnalyser = all.some((word) => analyserWords.has(word));
    if (isSonic !== isAnalyser) {
      return {
        ...none,
        channel: isSonic ? 'sonicStatus' : 'analyserStatus',
        strength: 'strong',
        instrument: isSonic ? 'sonic' : 'analyser',
      };
    }
    return { ...none, channel: 'analyserStatus', strength: 'weak' };
  }
  if (all.some((word) => foulingWords.has(word)))
    return { ...none, channel: 'signalStrength', strength: 'strong', isFouling: true };
  if (all.some((word) => signalWords.has(word)))
    return { ...none, channel: 'signalStrength', strength: 'strong' };

  // "t_c" is a temperature in °C, while "rho_c" is a density of CO2: the whole name is tried before its suffix is taken off
  for (const candidate of [all, split.rest]) {
    let measure: NameReading['measure'] = null;
    const rest = candidate.filter((word) => {
      const says = gasMeasureWords[word];
      if (says !== undefined) measure = strongestMeasure(measure, says);
      return says === undefined;
    });
    const joined = rest.join('');
    const glued = Object.keys(gasMeasureWords).find(
      (word) => word.length > 2 && joined.endsWith(word) && joined.length > word.length,
    );
    const keys = glued ? [joined, joined.slice(0, -glued.length)] : [joined];
    for (const key of keys) {
      for (const [strength, names] of [
        ['strong', strongNames],
        ['weak', weakNames],
      ] as const) {
        for (const [channel, set] of Object.entries(names) as [ChannelKey, ReadonlySet<string>][]) {
          if (!set.has(key)) continue;
          const isGas = channel === 'co2' || channel === 'h2o';
          if (measure !== null && !isGas) continue;
          const gluedMeasure = glued && key !== joined ? (gasMeasureWords[glued] ?? null) : null;
          return {
            ...none,
            unitText: candidate === all ? inBrackets : unitText,
            channel,
            strength,
            measure: isGas
              ? (measure ?? gluedMeasure ?? measureOfKey(key))
              : /^(sos|speedofsound|soundspeed|csound)$/.test(key)
                ? 'speed-of-sound'
                : null,
          };
        }
      }
    }
  }
  return null;
}

function strongestMeasure(now: NameReading['measure'], next: NameReading['measure']): NameReading['measure'] {
  // "dry mole fraction" is dry, "molar density" molar
  const rank = (measure: NameReading['measure']): number =>
    measure === 'dry-mole-fraction'
      ? 3
      : measure === 'mass-density' || measure === 'molar-density'
        ? 2
        : measure === null
          ? 0
          : 1;
  return rank(next) >= rank(now) ? next : now;
}

function measureOfKey(key: string): NameReading['measure'] {
  if (/^(rho|co2rho|h2orho|ah|abs|humidityabs)/.test(key)) return 'density';
  if (/^chi/.test(key)) return 'dry-mole-fraction';
  if (/^x|x$/.test(key)) return 'mole-fraction';
  return null;
}

const timeNames: readonly (readonly [ReadonlySet<string>, TimeNameReading['role']])[] = [
  [
    words(
      'timestamp datetime dateandtime datetimestamp stamp timestampstart timestampend timestamputc datetimeutc utcdatetime',
    ),
    'stamp',
  ],
  [words('date day_date yyyymmdd'), 'date'],
  [words('time clock timeofday tod hhmmss timeutc utctime utc'), 'clock'],
  [words('year yyyy yr'), 'year'],
  [words('month mon mm'), 'month'],
  [words('dd dom dayofmonth'), 'day-of-month'],
  [words('doy dayofyear jday julianday yearday yday jd day daynumber'), 'day-of-year'],
  [words('hhmm hourminute hourmin'), 'hhmm'],
  [words('hour hh hr'), 'hour'],
  [words('minute min'), 'minute'],
  [words('second seconds sec secs ss s'), 'second'],
  [words('secondsofday secofday sod secondofday daysecond'), 'seconds-of-day'],
  [words('epoch unixtime unix epochtime epochms posix posixtime unixms unixs epochs'), 'epoch'],
  [words('elapsed elapsedtime elapseds runtime'), 'elapsed'],
  [
    words('record recno recordno rec recordnumber n counter count scan scanno row index no id seq sequence'),
    'counter',
  ],
];

/** What the name of a column says about time; null when it says nothing. */
export function readTimeName(name: string): TimeNameReading | null {
  const joined = wordsOf(name).join('');
  for (const [set, role] of timeNames) if (set.has(joined)) return { role };
  return null;
}

const unitSpellings: readonly (readonly [RegExp, string])[] = [
  [/^(m\/s|ms-1|m\/sec|mps|meterpersecond|metrespersecond)$/, 'm s-1'],
  [/^(cm\/s|cms-1)$/, 'cm s-1'],
  [/^(km\/h|kmh-1|kph|kmh)$/, 'km h-1'],
  [/^(degc|c|celsius|degreec|degreescelsius|gradc)$/, 'degC'],
  [/^(k|kelvin|degk)$/, 'K'],
  [/^(mmol\/m3|mmolm-3|mmolm3)$/, 'mmol m-3'],
  [/^(umol\/m3|umolm-3)$/, 'umol m-3'],
  [/^(mol\/m3|molm-3)$/, 'mol m-3'],
  [/^(mg\/m3|mgm-3|mgm3|mgco2\/m3|mgco2m-3)$/, 'mg m-3'],
  [/^(g\/m3|gm-3|gm3|gh2o\/m3|gh2om-3)$/, 'g m-3'],
  [/^(umol\/mol|umolmol-1|ppm|ppmv|umolco2\/mol|umolco2mol-1)$/, 'umol mol-1'],
  [/^(mmol\/mol|mmolmol-1|ppt|ppth|permil|permille|mmolh2o\/mol|mmolh2omol-1)$/, 'mmol mol-1'],
  [/^(hpa|mbar|mb)$/, 'hPa'],
  [/^kpa$/, 'kPa'],
  [/^pa$/, 'Pa'],
  [/^(%|percent|pct)$/, '%'],
  [/^(1|-|none|dimensionless|ratio|fraction)$/, '1'],
  [/^(code|bit|bits|flag|int|integer|dec|#)$/, 'code'],
];

/** A written unit in the layout's spelling; null when it is none that we know. `isDry`: "dry" stood beside it. */
export function readUnit(text: string): { unit: string; isDry: boolean } | null {
  const isDry = /\bdry\b/i.test(text);
  const bare = text
    .replace(/\b(dry|wet|moist)\b|\((dry|wet)\)/gi, '')
    .replace(/[[\](){}<>]/g, '')
    .replace(/[µμ]/g, 'u')
    .replace(/°/g, 'deg')
    .replace(/⁻/g, '-')
    .replace(/−/g, '-')
    .replace(/¹/g, '1')
    .replace(/³/g, '3')
    .replace(/\^/g, '')
    .replace(/\*\*/g, '')
    .toLowerCase()
    .replace(/[\s.·*_]+/g, '');
  if (bare === '') return null;
  for (const [expression, unit] of unitSpellings) if (expression.test(bare)) return { unit, isDry };
  return null;
}

/** The unit a channel would carry for a written one; null when that channel cannot have it. */
export function unitForChannel(
  channel: ChannelKey,
  reading: { unit: string; isDry: boolean },
): string | null {
  const allowed = channelUnits[channel] as readonly string[];
  const dry = `${reading.unit} dry`;
  if (reading.isDry && allowed.includes(dry)) return dry;
  return allowed.includes(reading.unit) ? reading.unit : null;
}
