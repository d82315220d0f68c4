import { fluxLabels, isQuantity, quantity, seriesLabels } from '../../processing/catalogue';
import { seriesKeys } from '../../processing/state';
import type { FluxKey, SeriesKey } from '../../processing/state';
import { fluxesOf } from '../../processing/steps/ledger';
import type { PeriodDetail } from '../../server/contract/api';

/** One test: the statistic it leaves in the values, and the key under which a finding of it is noted. */
interface Test {
  statistic: string;
  reason: string;
  fluxes: readonly FluxKey[];
}

const allFluxes: readonly FluxKey[] = ['momentum', 'sensibleHeat', 'latentHeat', 'co2Flux'];
const analyserSeries: readonly SeriesKey[] = ['co2', 'h2o'];

/** Tests of one working series by the statistic they leave. */
const seriesTests: readonly [statistic: string, reason: string][] = [
  ['missing', 'completeness'],
  ['implausible', 'plausibility'],
  ['spikes', 'screening.spikes'],
  ['screening.emptyBins', 'screening.amplitudeResolution'],
  ['screening.dropoutInterior', 'screening.dropouts'],
  ['screening.skewness', 'screening.skewness'],
  ['screening.kurtosis', 'screening.kurtosis'],
  ['screening.haarMean', 'screening.discontinuityMean'],
  ['screening.haarVariance', 'screening.discontinuityVariance'],
];

const union = (series: readonly SeriesKey[]): FluxKey[] =>
  allFluxes.filter((flux) => series.some((one) => fluxesOf(one).includes(flux)));

const tests: readonly Test[] = [
  { statistic: 'rejectedByStatus.sonic', reason: 'diagnostics.sonic', fluxes: allFluxes },
  { statistic: 'rejectedByStatus.analyser', reason: 'diagnostics.analyser', fluxes: union(analyserSeries) },
  ...seriesKeys.flatMap((series) =>
    seriesTests.map(([statistic, reason]) => ({
      statistic: `${statistic}.${series}`,
      reason: `${reason}.${series}`,
      fluxes: fluxesOf(series),
    })),
  ),
  ...analyserSeries.map((gas) => ({
    statistic: `screening.lag.${gas}`,
    reason: `screening.lag.${gas}`,
    fluxes: fluxesOf(gas),
  })),
  { statistic: 'screening.angleOfAttack', reason: 'screening.angleOfAttack', fluxes: fluxesOf('windW') },
  {
    statistic: 'screening.windNonstationarity',
    reason: 'screening.windNonstationarity',
    fluxes: union(['windU', 'windV']),
  },
  { statistic: 'windDirection', reason: 'sectors.mast', fluxes: allFluxes },
  ...allFluxes.map((flux) => ({
    statistic: `steadyState.${flux}`,
    reason: `steadyState.${flux}`,
    fluxes: [flux],
  })),
  { statistic: 'integralTurbulence.windW', reason: 'integralTurbulence.windW', fluxes: allFluxes },
  { statistic: 'integralTurbulence.windU', reason: 'integralTurbulence.windU', fluxes: ['momentum'] },
];

export interface PassedTest {
  /** Key of the statistic among the values. */
  key: string;
  label: string;
}

/**
 * Tests that bear on a flux, left a statistic, and found nothing: what "23 other tests within limits" counts.
 *
 * A test counts once, whatever number of limits it has. Findings that change no grade are findings too and are left out.
 */
export function passedTests(
  period: Pick<PeriodDetail, 'outcome' | 'values' | 'reasons'>,
  flux: FluxKey,
): PassedTest[] {
  // what was stopped at the door was not tested
  if (period.outcome !== 'computed' && period.outcome !== 'partial') return [];
  const found = new Set(period.reasons.map((reason) => reason.key));
  const isSectorFinding = period.reasons.some((reason) => reason.key.startsWith('sectors.'));
  return tests.flatMap(({ statistic, reason, fluxes }) => {
    if (!fluxes.includes(flux) || found.has(reason)) return [];
    if (period.values[statistic] == null) return [];
    if (reason === 'sectors.mast' && isSectorFinding) return [];
    return [{ key: statistic, label: testLabel(statistic) }];
  });
}

function testLabel(statistic: string): string {
  if (statistic === 'windDirection') return 'wind direction outside of disturbed sectors';
  const label = isQuantity(statistic) ? quantity(statistic).label : statistic;
  const series = statistic.split('.').at(-1) ?? '';
  // the catalogue's labels of statistics already name their series
  return (
    label || seriesLabels[series as SeriesKey]?.label || fluxLabels[series as FluxKey]?.label || statistic
  );
}
