import { useMemo } from 'react';
import { View } from 'react-native';
import { fluxLabels } from '../../processing/catalogue';
import type { SeriesData } from '../../server/contract/api';
import { usePeriod } from '../data/use-run-results';
import type { StationClock } from '../format/useClock';
import { useCursorMs, useSeriesCursor } from '../plots/series-cursor';
import { periodIndexAt } from '../plots/series-plot';
import { GradeMark, Icon, IconButton, Rule, Text, TextLink, UnitText } from '../primitives';
import { gradeColour, gradeSpoken, space, useTheme } from '../tokens';
import { glanceAt } from './period-columns';
import { fluxGrade, shownFluxes, verdictFlux, verdictWords } from './period-view';
import { useSettled } from './use-settled';

interface CursorPartProps {
  data: SeriesData;
  clock: StationClock;
}

/** Phone, at the top: which period the values above the panels are of, and the way to its neighbours. */
export function CursorBar({ data, clock, onStep }: CursorPartProps & { onStep: (by: number) => void }) {
  const cursorMs = useCursorMs();
  const index = cursorMs === null ? -1 : periodIndexAt(data.startMs, data.endMs, cursorMs);
  const glance = index < 0 ? null : glanceAt(data, index);
  return (
    <View>
      <View
        style={{
          flexDirection: 'row',
          alignItems: 'center',
          paddingHorizontal: space.s,
          minHeight: 60,
        }}
      >
        <IconButton
          bare
          label="Previous period"
          icon={<Icon name="back" size={24} />}
          disabled={index <= 0}
          onPress={() => onStep(-1)}
        />
        <View style={{ flex: 1, alignItems: 'center' }}>
          <Text variant="section" level={2}>
            {glance ? clock.periodClock(glance.startMs, glance.endMs) : 'No period here'}
          </Text>
          <Text variant="small" soft>
            {glance ? `${clock.day(glance.startMs)}, ${clock.zone}` : 'touch a panel'}
          </Text>
        </View>
        <IconButton
          bare
          label="Next period"
          icon={<Icon name="forward" size={24} />}
          disabled={index >= data.startMs.length - 1}
          onPress={() => onStep(1)}
        />
      </View>
      <Rule double />
    </View>
  );
}

/** Phone, above the spine: the verdict of the period under the cursor, and the way to its reasons. */
export function CursorVerdict({
  group,
  runId,
  data,
  hrefOf,
}: Omit<CursorPartProps, 'clock'> & {
  group: string;
  runId: string;
  hrefOf: (startMs: number) => string;
}) {
  const { colour } = useTheme();
  const cursorMs = useCursorMs();
  const index = cursorMs === null ? -1 : periodIndexAt(data.startMs, data.endMs, cursorMs);
  const glance = index < 0 ? null : glanceAt(data, index);
  const settledStart = useSettled(glance?.startMs ?? Number.NaN, 140);
  const detailQuery = usePeriod(group, runId, settledStart);
  if (!glance) return null;
  const detail = detailQuery.data?.startMs === glance.startMs ? detailQuery.data : null;
  const flux = verdictFlux(detail ?? glance);
  const grade = fluxGrade(glance, flux);
  return (
    <View
      style={{
        flexDirection: 'row',
        alignItems: 'center',
        gap: space.m,
        minHeight: 60,
        paddingHorizontal: space.l,
        backgroundColor: colour.panel,
        borderTopWidth: grade === 0 ? 1 : 2,
        borderTopColor: grade === 0 ? colour.rule : gradeColour(grade, colour),
      }}
    >
      <GradeMark grade={grade} show="none" size={18} />
      <View style={{ flex: 1, minWidth: 0 }}>
        <Text numberOfLines={2} size={14}>
          <Text strong size={14}>
            <UnitText>{fluxLabels[flux].symbol}</UnitText>{' '}
            {grade === null ? 'has no value. ' : `graded ${grade}. `}
          </Text>
          <UnitText>{detail ? capitalised(verdictWords(detail, flux)) : ''}</UnitText>
        </Text>
      </View>
      <TextLink standing label="Why?" ariaLabel="Why? Open this period" href={hrefOf(glance.startMs)} />
    </View>
  );
}

const capitalised = (text: string) => text.charAt(0).toUpperCase() + text.slice(1);

/** Says the chosen period to a screen reader once it stands still; what the mouse passes over stays unsaid. */
export function CursorSpoken({ data, clock }: CursorPartProps) {
  const cursor = useSeriesCursor();
  const cursorMs = useCursorMs();
  const settled = useSettled(cursorMs, 350);
  const isSaid = cursor.isTouched() && settled !== null && cursor.chosenMs() === settled;
  const words = useMemo(() => {
    const glance = isSaid ? glanceAt(data, periodIndexAt(data.startMs, data.endMs, settled)) : null;
    if (!glance) return '';
    const grades = shownFluxes.map(
      (flux) => `${fluxLabels[flux].symbol} ${gradeSpoken(fluxGrade(glance, flux))}`,
    );
    return `${clock.period(glance.startMs, glance.endMs)}: ${grades.join(', ')}`;
  }, [isSaid, settled, data, clock]);
  return (
    <p className="gb-unseen" aria-live="polite">
      {words}
    </p>
  );
}
