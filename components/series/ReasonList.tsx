import { useState } from 'react';
import { View } from 'react-native';
import { fluxLabels } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import type { PeriodDetail } from '../../server/contract/api';
import type { StationClock } from '../format/useClock';
import { formatQuantity, unitOf } from '../format/quantities';
import { Button, FactRow, ReasonCard, Text, TextLink, UnitText } from '../primitives';
import type { LimitBarProps } from '../primitives/LimitBar';
import { gradeWord } from '../tokens';
import { passedTests } from './passed-tests';
import { fluxGrade, reasonsOf } from './period-view';
import type { PeriodReason } from './period-view';

export interface ReasonListProps {
  period: PeriodDetail;
  flux: FluxKey;
  /** Show no more than these; the rest is counted. */
  most?: number;
  /** Where the rest is. */
  moreHref?: string;
  /** Names the clock time at which a finding begins. */
  clock?: StationClock;
  /** The tests that found nothing can be listed. */
  withPassed?: boolean;
  level?: 2 | 3;
}

/** "Why FC is graded 2": what decides first, then what else was found, then how many tests found nothing. */
export function ReasonList({
  period,
  flux,
  most = 99,
  moreHref,
  clock,
  withPassed = false,
  level = 3,
}: ReasonListProps) {
  const grade = fluxGrade(period, flux);
  const reasons = reasonsOf(period, flux);
  const shown = reasons.slice(0, most);
  const decided = period.grades[flux]?.decidedBy ?? [];
  const passed = passedTests(period, flux);
  const isClean = reasons.every((reason) => reason.grade === 0);
  return (
    <View>
      <Text variant={level === 2 ? 'section' : 'label'} level={level} style={{ paddingBottom: 6 }}>
        Why <UnitText>{fluxLabels[flux].symbol}</UnitText>{' '}
        {grade === null ? 'has no value' : `is graded ${grade}, ${gradeWord(grade)}`}
      </Text>
      {isClean && grade !== null ? (
        <ReasonCard
          grade={0}
          finding={
            passed.length > 0 ? `All ${passed.length} tests within limits` : 'Every test within limits'
          }
        >
          {withPassed ? <PassedTests tests={passed} values={period.values} isOpenAtFirst /> : null}
        </ReasonCard>
      ) : null}
      {shown.map((reason) => (
        <ReasonCard
          key={reason.key}
          grade={reason.grade}
          finding={reason.finding}
          sentence={<UnitText>{reason.sentence}</UnitText>}
          decides={reason.grade === 2 && decided.includes(reason.key)}
          limit={limitOf(reason)}
        >
          {clock && reason.atS != null && reason.atS > 0 ? (
            <Text variant="small" soft>
              Seen at {clock.clock(period.startMs + reason.atS * 1000, true)}.
            </Text>
          ) : null}
        </ReasonCard>
      ))}
      {reasons.length > shown.length ? (
        <Text variant="small" soft style={{ paddingVertical: 6 }}>
          {reasons.length - shown.length} more {reasons.length - shown.length === 1 ? 'finding' : 'findings'}{' '}
          {moreHref ? <TextLink label="on the period's page" href={moreHref} /> : "on the period's page"}
        </Text>
      ) : null}
      {!isClean && passed.length > 0 ? (
        <ReasonCard
          grade={0}
          finding={`${passed.length} other ${passed.length === 1 ? 'test' : 'tests'} within limits`}
        >
          {withPassed ? <PassedTests tests={passed} values={period.values} /> : null}
        </ReasonCard>
      ) : null}
    </View>
  );
}

function PassedTests({
  tests,
  values,
  isOpenAtFirst = false,
}: {
  tests: ReturnType<typeof passedTests>;
  values: PeriodDetail['values'];
  isOpenAtFirst?: boolean;
}) {
  const [isOpen, setOpen] = useState(isOpenAtFirst);
  if (tests.length === 0) return null;
  return (
    <View style={{ gap: 4 }}>
      <View style={{ alignItems: 'flex-start', marginLeft: -10 }}>
        <Button
          kind="quiet"
          label={isOpen ? 'Hide them' : 'Which ones?'}
          ariaExpanded={isOpen}
          onPress={() => setOpen((open) => !open)}
        />
      </View>
      {isOpen
        ? tests.map((test) => (
            <FactRow key={test.key} label={test.label.charAt(0).toUpperCase() + test.label.slice(1)}>
              <Text variant="figure" size={13}>
                {formatQuantity(test.key, values[test.key])}
                {unitOf(test.key) === '' ? '' : unitOf(test.key) === '°' ? '°' : ` ${unitOf(test.key)}`}
              </Text>
            </FactRow>
          ))
        : null}
    </View>
  );
}

/** The limit bar of a finding; none where nothing is measured against a limit. */
export function limitOf(
  reason: Pick<PeriodReason, 'limits' | 'statistic' | 'grade'>,
): LimitBarProps | undefined {
  const { limits, statistic } = reason;
  const some = Object.values(limits).filter((limit): limit is number => limit !== null);
  if (some.length === 0 || statistic.value === null) return undefined;
  // nought against nought has no scale
  if (statistic.value === 0 && some.every((limit) => limit === 0)) return undefined;
  return {
    label: statistic.label,
    value: statistic.value,
    unit: statistic.unit === '1' ? '' : statistic.unit === 'deg' ? '°' : statistic.unit,
    decimals: limitDecimals(statistic.value, some),
    grade: reason.grade,
    ...limits,
  };
}

/** As many decimals as show on which side of each limit a value lies, at most three. */
export function limitDecimals(value: number, limits: readonly number[]): number {
  const least = Math.abs(value) >= 10 || Number.isInteger(value) ? 0 : Math.abs(value) >= 1 ? 1 : 2;
  for (let decimals = least; decimals < 3; decimals += 1) {
    const shown = Number(value.toFixed(decimals));
    if (limits.every((limit) => Math.sign(shown - limit) === Math.sign(value - limit))) return decimals;
  }
  return 3;
}
