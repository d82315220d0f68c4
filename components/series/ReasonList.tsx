import { View } from 'react-native';
import { fluxLabels } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import type { PeriodDetail } from '../../server/contract/api';
import { ReasonCard, Text, TextLink, UnitText } from '../primitives';
import { gradeSpoken } from '../tokens';
import { fluxGrade, reasonsOf } from './period-view';
import type { PeriodReason } from './period-view';

export interface ReasonListProps {
  period: PeriodDetail;
  flux: FluxKey;
  /** Show no more than these; the rest is counted. */
  most?: number;
  moreHref?: string;
}

/** "Why FC is graded 2": what decides first, then what else was found. */
export function ReasonList({ period, flux, most = 99, moreHref }: ReasonListProps) {
  const grade = fluxGrade(period, flux);
  const reasons = reasonsOf(period, flux);
  const shown = reasons.slice(0, most);
  const decided = period.grades[flux]?.decidedBy ?? [];
  return (
    <View>
      <Text variant="label" level={3} style={{ paddingBottom: 6 }}>
        Why <UnitText>{fluxLabels[flux].symbol}</UnitText>{' '}
        {grade === null ? 'has no value' : `is graded ${gradeSpoken(grade)}`}
      </Text>
      {shown.map((reason) => (
        <ReasonCard
          key={reason.key}
          grade={reason.grade}
          finding={reason.finding}
          sentence={reason.sentence}
          decides={grade === 2 && decided.includes(reason.key)}
          limit={limitOf(reason)}
        />
      ))}
      {reasons.length > shown.length ? (
        <Text variant="small" soft>
          {reasons.length - shown.length} more findings{' '}
          {moreHref ? <TextLink label="on the period's page" href={moreHref} /> : "on the period's page"}
        </Text>
      ) : null}
      {reasons.every((reason) => reason.grade === 0) && grade !== null ? (
        <ReasonCard grade={0} finding="Every test within its limits" />
      ) : null}
    </View>
  );
}

function limitOf(reason: PeriodReason) {
  const { limits, statistic } = reason;
  const some = Object.values(limits).some((limit) => limit !== null);
  if (!some || statistic.value === null) return undefined;
  return {
    label: statistic.label,
    value: statistic.value,
    unit: statistic.unit === '1' ? '' : statistic.unit,
    decimals: Math.abs(statistic.value) >= 10 ? 0 : Math.abs(statistic.value) >= 1 ? 1 : 2,
    grade: reason.grade,
    softHigh: limits.softHigh,
    hardHigh: limits.hardHigh,
    softLow: limits.softLow,
    hardLow: limits.hardLow,
  };
}
