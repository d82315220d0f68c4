import { fluxLabels, isQuantity, quantity, seriesLabels } from '../../processing/catalogue';
import type { FluxKey, Reason, SeriesKey } from '../../processing/state';
import { formatNumber } from '../format/numbers';

/** How settings and findings of the step ledger are written: names in words, numbers with the unit people read. */

export interface LedgerFact {
  label: string;
  value: string;
}

type LedgerValue = string | number | boolean | null;

/** Units that a key's last word names. */
const unitSuffixes: [suffix: RegExp, unit: string][] = [
  [/Percent$/, '%'],
  [/Points$/, ''],
  [/DegC$/, '°C'],
  [/Deg$/, '°'],
  [/KPa$/, 'kPa'],
  [/Pa$/, 'Pa'],
  [/RateHz$/, 'Hz'],
  [/Minutes$/, 'min'],
  [/Ms$/, 'm s-1'],
  [/S$/, 's'],
  [/M$/, 'm'],
  [/K$/, 'K'],
];

/** Keys whose last capital is no unit, or whose words would not be understood. */
const names: Record<string, { label: string; unit?: string }> = {
  rateHz: { label: 'sampling rate', unit: 'Hz' },
  sampleRateHz: { label: 'sampling rate', unit: 'Hz' },
  fittedRateHz: { label: 'sampling rate found', unit: 'Hz' },
  relativeDropPoints: { label: 'drop allowed below the reference', unit: '%' },
  discontinuityWindowS: { label: 'window of the step test', unit: 's' },
  windowPoints: { label: 'samples in a window', unit: '' },
  windowStepPoints: { label: 'samples between windows', unit: '' },
  molarDensity: { label: 'molar density of air', unit: 'mol m-3' },
  co2MoleFractionLow: { label: 'lowest CO2 mole fraction', unit: 'µmol mol-1' },
  co2MoleFractionHigh: { label: 'highest CO2 mole fraction', unit: 'µmol mol-1' },
  h2oMoleFractionLow: { label: 'lowest H2O mole fraction', unit: 'mmol mol-1' },
  h2oMoleFractionHigh: { label: 'highest H2O mole fraction', unit: 'mmol mol-1' },
  h2oMeasure: { label: 'H2O recorded as' },
  co2Measure: { label: 'CO2 recorded as' },
  goodPercent: { label: 'good up to', unit: '%' },
  usablePercent: { label: 'usable up to', unit: '%' },
  subIntervals: { label: 'short intervals' },
  shortCovariance: { label: 'mean of the short covariances' },
  wholeCovariance: { label: 'covariance of the whole period' },
  mad: { label: 'median absolute deviation' },
  ssitc: { label: 'steady state and turbulence alone' },
  class9: { label: 'class of nine' },
  decidedBy: { label: 'decided by' },
  maxLagS: { label: 'longest lag summed', unit: 's' },
  crosswindDone: { label: 'corrected by the sonic' },
  zeta: { label: 'z/L' },
  separation: { label: 'sensor separation corrected' },
  responseTime: { label: 'response time, form' },
  warnFactor: { label: 'factor that warns' },
  rejectFactor: { label: 'factor that rejects' },
  windChangeAlong: { label: 'change along the wind, of its mean' },
  windChangeCross: { label: 'change across the wind, of its mean' },
  trendShare: { label: 'variance of the straight drift', unit: '%' },
  trendPerHour: { label: 'straight drift per hour' },
  co2DryRatioChange: { label: 'change of CO2 dry mole fraction', unit: 'µmol mol-1' },
  temperatureFlux: { label: 'kinematic heat flux', unit: 'K m s-1' },
};

/** Factors from the inner unit where the name above states another. */
const scales: Record<string, number> = { trendShare: 100, co2DryRatioChange: 1e6 };

const gasUnit = { factor: 1e3, unit: 'mmol m-3' };

/** Units of `…​.series` statistics that are in the unit of the series itself. */
const inSeriesUnit = new Set(['median', 'mad', 'trendPerHour']);

/** Catalogue quantities in which covariances of the ledger are read. */
const covarianceQuantities: Record<string, string> = {
  momentum: 'covUW',
  sensibleHeat: 'covWTs',
  latentHeat: 'covWH2o',
  co2Flux: 'covWCo2',
  co2: 'covWCo2',
  h2o: 'covWH2o',
  covUWRandom: 'covUW',
};
const covarianceKeys = new Set([
  'shortCovariance',
  'wholeCovariance',
  'covarianceAtZero',
  'covarianceAtLag',
  'noiseLevel',
]);

/** Ledger keys that are catalogue quantities under a name of the step's own. */
const sameAs: Record<string, string> = {
  co2Covariance: 'co2CovarianceTerm',
  obukhovLengthM: 'obukhovLength',
  ustarMs: 'ustar',
  windSpeedMs: 'windSpeed',
  windDirectionDeg: 'windDirection',
  pressurePa: 'airPressure',
};

/**
 * One line of the ledger in words.
 *
 * @param reasons of the period, to write keys of findings as what was found
 */
export function ledgerFact(
  key: string,
  value: LedgerValue,
  reasons: readonly Pick<Reason, 'key' | 'finding'>[] = [],
): LedgerFact {
  const [head = key, subject = ''] = key.split('.');
  // the ledger counts spikes; the catalogue's quantity of the same key is their share
  const isCount = head === 'spikes';
  const whole =
    isQuantity(key) && !isCount
      ? key
      : (sameAs[key] ?? (covarianceKeys.has(head) || head === 'covUWRandom' ? null : undefined));
  if (typeof whole === 'string' && typeof value === 'number') {
    const { label, unit, factor, offset, decimals } = quantity(whole);
    return {
      label: capitalised(label),
      value: withUnit(formatNumber(value * factor + offset, decimals), unit),
    };
  }
  const covariance = covarianceQuantities[subject || head];
  if (whole === null && covariance !== undefined && typeof value === 'number') {
    const { unit, factor, decimals } = quantity(covariance);
    return {
      label: subjectLabel(
        head === 'covUWRandom' ? 'sampling error of the covariance' : nameOf(head).label,
        subject,
      ),
      value: withUnit(formatNumber(value * factor, decimals), unit),
    };
  }
  const { label, unit } = nameOf(head);
  const written = head === 'decidedBy' && typeof value === 'string' ? findingsOf(value, reasons) : null;
  if (written !== null) return { label: subjectLabel(label, subject), value: written };
  if (typeof value === 'number' && inSeriesUnit.has(head) && subject in seriesLabels) {
    const isGas = subject === 'co2' || subject === 'h2o';
    const seriesUnit = isGas ? gasUnit.unit : seriesLabels[subject as SeriesKey].unit;
    return {
      label: subjectLabel(label, subject),
      value: withUnit(figure(value * (isGas ? gasUnit.factor : 1)), seriesUnit),
    };
  }
  const scaled = typeof value === 'number' ? value * (scales[head] ?? 1) : value;
  return {
    label: subjectLabel(label, subject),
    value: typeof scaled === 'number' ? withUnit(figure(scaled), unit) : plain(scaled),
  };
}

function findingsOf(keys: string, reasons: readonly Pick<Reason, 'key' | 'finding'>[]): string {
  return keys
    .split(', ')
    .map((key) => reasons.find((reason) => reason.key === key)?.finding ?? spaced(key))
    .join('; ');
}

function nameOf(head: string): { label: string; unit: string } {
  const known = names[head];
  if (known) return { label: known.label, unit: known.unit ?? '' };
  for (const [suffix, unit] of unitSuffixes) {
    if (suffix.test(head) && head.length > head.match(suffix)![0].length)
      return { label: spaced(head.replace(suffix, suffix.source === 'RateHz$' ? 'Rate' : '')), unit };
  }
  return { label: spaced(head), unit: '' };
}

function subjectLabel(label: string, subject: string): string {
  if (subject === '') return capitalised(label);
  const symbol =
    seriesLabels[subject as SeriesKey]?.label ??
    fluxLabels[subject as FluxKey]?.symbol ??
    (subject === 'uw' ? 'u and w' : spaced(subject));
  return `${capitalised(label)}, ${symbol}`;
}

/** "softMissingPercent" → "soft missing percent"; CO2 and H2O stay as they are written. */
export function spaced(key: string): string {
  return key
    .replace(/([a-z0-9])([A-Z])/g, '$1 $2')
    .replace(/[._]/g, ' ')
    .toLowerCase()
    .replace(/\bco2\b/g, 'CO2')
    .replace(/\bh2o\b/g, 'H2O')
    .replace(/\bu w\b/g, 'u and w');
}

const capitalised = (text: string) =>
  /^(z\/L|u |w |u\*)/.test(text) ? text : text.charAt(0).toUpperCase() + text.slice(1);

function withUnit(figureText: string, unit: string): string {
  if (unit === '' || unit === '1') return figureText;
  return unit === '°' ? `${figureText}°` : `${figureText} ${unit}`;
}

const superscript: Record<string, string> = { '-': '−' };

/** Four significant digits or so; very small and very large ones as a power of ten. */
export function figure(value: number): string {
  if (!Number.isFinite(value)) return 'no value';
  if (Number.isInteger(value) && Math.abs(value) < 1e9) return formatNumber(value, 0);
  const size = Math.abs(value);
  if (size < 1e-3 || size >= 1e9) {
    const [digits = '', power = ''] = value.toExponential(2).split('e');
    return size < 1e-12
      ? '0'
      : `${digits.replace('-', '−')}e${power.replace('+', '').replace('-', superscript['-'] ?? '-')}`;
  }
  return formatNumber(value, size >= 1000 ? 0 : size >= 100 ? 1 : size >= 1 ? 2 : size >= 0.1 ? 3 : 4);
}

function plain(value: string | boolean | null): string {
  if (value === null) return 'none';
  if (typeof value === 'boolean') return value ? 'yes' : 'no';
  if (value === 'median-mad') return 'median/MAD';
  return /^[a-z]+(-[a-z0-9]+)+$/.test(value) ? value.replaceAll('-', ' ') : value;
}
