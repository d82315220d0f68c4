import { View } from 'react-native';
import { router } from 'expo-router';
import type { Href } from 'expo-router';
import type { StationSummary } from '../../server/contract/api';
import { useGroupEvents } from '../data/use-group-events';
import { useMay } from '../data/use-me';
import { useStations } from '../data/use-stations';
import { formatCount, formatNumber, formatPlural } from '../format/numbers';
import { useClock } from '../format/useClock';
import {
  Button,
  EmptyState,
  ErrorNotice,
  LoadingLine,
  PageBody,
  PageHead,
  Text,
  TextLink,
} from '../primitives';
import { FindingMark } from '../raw-files/FindingMark';
import { GradeTable } from '../runs/GradeTable';
import { useWidth } from '../series/use-width';
import { AppShell, groupPath, stationPath } from '../shell';
import { Spine } from '../spine/Spine';
import { byNeed, stationFinding, stationsHeading } from '../stations/station-findings';
import { space, useTheme, useWide } from '../tokens';

/** From so many on, stations that need nothing are shown as one row each. */
const compactFrom = 5;

/** All stations of a group: which need a hand, what each recorded, how it was graded. */
export function StationsScreen({ group }: { group: string }) {
  useGroupEvents(group);
  const wide = useWide();
  const query = useStations(group);
  const mayCreate = useMay(group, 'station.create');
  const newStation = `${groupPath(group)}/new-station`;
  const stations = query.data ? byNeed(query.data) : [];
  const needing = stations.filter((summary) => stationFinding(summary).mark > 0);
  return (
    <AppShell
      title="Stations"
      groupSlug={group}
      place="stations"
      actions={
        mayCreate
          ? [
              {
                key: 'new',
                label: 'New station',
                icon: 'plus',
                onPress: () => router.push(newStation as Href),
              },
            ]
          : []
      }
      side={
        wide && needing.length > 0 && stations.length > 1 ? (
          <DoNext group={group} stations={needing} />
        ) : undefined
      }
      sideWidth={320}
    >
      <PageHead
        title={query.data ? stationsHeading(query.data) : 'Stations'}
        subtitle={
          query.data && query.data.length > 1
            ? `${formatPlural(query.data.length, 'station')}, those that need something first`
            : undefined
        }
        actions={
          wide && mayCreate && stations.length > 0 ? (
            <Button label="New station" href={newStation} />
          ) : undefined
        }
      />
      {query.isPending || query.error ? (
        <PageBody>
          {query.isPending ? <LoadingLine label="reading the stations" /> : null}
          {query.error ? <ErrorNotice error={query.error} onRetry={() => void query.refetch()} /> : null}
        </PageBody>
      ) : null}
      {query.data && stations.length === 0 ? (
        <PageBody>
          <EmptyState
            title="This group has no station."
            action={
              mayCreate ? (
                <Button kind="primary" label="Make the first station" href={newStation} />
              ) : undefined
            }
          >
            {mayCreate
              ? 'Write where it stands and what it carries; then bring in raw files, and fluxes follow.'
              : 'Leads, analysts and technicians can make one.'}
          </EmptyState>
        </PageBody>
      ) : null}
      <View role="list" aria-label="Stations">
        {stations.map((summary) =>
          stations.length >= compactFrom && stationFinding(summary).mark === 0 ? (
            <StationRow key={summary.id} group={group} summary={summary} />
          ) : (
            <StationCard key={summary.id} group={group} summary={summary} />
          ),
        )}
      </View>
    </AppShell>
  );
}

function DoNext({ group, stations }: { group: string; stations: readonly StationSummary[] }) {
  const { colour } = useTheme();
  return (
    <View style={{ gap: space.m }}>
      <Text variant="part" level={2}>
        Do next
      </Text>
      {stations.map((summary) => {
        const finding = stationFinding(summary);
        return (
          <View
            key={summary.id}
            style={{
              flexDirection: 'row',
              borderTopWidth: 1,
              borderTopColor: colour.hair,
              paddingTop: space.m,
            }}
          >
            <FindingMark
              mark={finding.mark}
              label={finding.mark === 2 ? 'nothing can be computed' : 'wants a hand'}
            />
            <View style={{ flex: 1, minWidth: 0, gap: 2 }}>
              <Text strong>{finding.title}</Text>
              <Text variant="small">{finding.text}</Text>
              <TextLink
                standing
                label={finding.action.label}
                href={stationPath(group, summary.station.slug, finding.action.place)}
              />
            </View>
          </View>
        );
      })}
    </View>
  );
}

function StationRow({ group, summary }: { group: string; summary: StationSummary }) {
  const { colour } = useTheme();
  const wide = useWide();
  const finding = stationFinding(summary);
  return (
    <View
      role="listitem"
      style={{
        flexDirection: 'row',
        alignItems: 'center',
        gap: space.s,
        paddingHorizontal: wide ? space.xl : space.l,
        minHeight: 48,
        borderBottomWidth: 1,
        borderBottomColor: colour.hair,
      }}
    >
      <FindingMark mark={finding.mark} label="up to date" size={12} />
      <TextLink
        standing
        label={summary.station.name}
        href={stationPath(group, summary.station.slug, 'series')}
      />
      <View style={{ flexShrink: 1, minWidth: 0 }}>
        <Text variant="small" soft numberOfLines={1}>
          {finding.text}
        </Text>
      </View>
    </View>
  );
}

function StationCard({ group, summary }: { group: string; summary: StationSummary }) {
  const { colour } = useTheme();
  const wide = useWide();
  const { station, setUp, latestRun, lastScanMs, firstScanMs } = summary;
  const clock = useClock(station.utcOffsetMinutes);
  const [width, onLayout] = useWidth();
  const finding = stationFinding(summary);
  const at = (place: string): string => stationPath(group, station.slug, place);
  return (
    <View
      role="listitem"
      style={{
        flexDirection: wide ? 'row' : 'column',
        gap: wide ? space.xl : space.m,
        paddingHorizontal: wide ? space.xl : space.l,
        paddingVertical: space.xl,
        borderBottomWidth: 1,
        borderBottomColor: colour.hair,
      }}
    >
      <View style={{ width: wide ? 264 : undefined, gap: 4 }}>
        <Text variant="section">{station.name}</Text>
        {station.description ? (
          <Text variant="small" soft>
            {station.description}
          </Text>
        ) : null}
        {setUp ? (
          <Text
            variant="small"
            soft
          >{`Set-up ${setUp.revision}: sonic at ${formatNumber(setUp.setUp.sonicHeightM, 1)} m over a canopy of ${formatNumber(setUp.setUp.canopyHeightM, 2)} m`}</Text>
        ) : null}
        {station.invented ? <Text variant="label">Invented records, no such place</Text> : null}
        <View style={{ paddingTop: space.s, gap: 2 }}>
          <Text variant="small" soft>
            Last scan
          </Text>
          <Text variant="figure" style={{ whiteSpace: 'normal' } as object}>
            {lastScanMs === null ? 'none yet' : clock.moment(lastScanMs)}
          </Text>
          <Text variant="small" soft>
            {lastScanMs === null || firstScanMs === null
              ? formatPlural(summary.rawFiles, 'raw file')
              : `${formatPlural(summary.rawFiles, 'raw file')} since ${clock.date(firstScanMs)} (${clock.zone})`}
          </Text>
        </View>
      </View>
      <View style={{ flex: wide ? 1 : undefined, minWidth: 0, gap: space.m }} onLayout={onLayout}>
        {summary.spine && width > 0 ? (
          <Spine compact data={summary.spine} width={width} offsetMinutes={clock.offsetMinutes} />
        ) : null}
        {latestRun && Object.keys(latestRun.grades).length > 0 ? (
          <GradeTable
            grades={latestRun.grades}
            label={`Run ${latestRun.number}, ${latestRun.recipeName}: % of periods`}
          />
        ) : null}
        <View style={{ flexDirection: 'row', alignItems: 'flex-start' }}>
          <FindingMark mark={finding.mark} label={finding.mark === 0 ? 'well' : 'wants a hand'} />
          <View style={{ flex: 1, minWidth: 0 }}>
            <Text>
              <Text strong>{`${finding.title}. `}</Text>
              {finding.text}
            </Text>
          </View>
        </View>
        <View style={{ flexDirection: 'row', flexWrap: 'wrap', columnGap: space.l, alignItems: 'center' }}>
          {finding.mark > 0 ? (
            <Button kind="primary" label={finding.action.label} href={at(finding.action.place)} />
          ) : null}
          {latestRun ? (
            <TextLink standing label="Series" ariaLabel={`Series of ${station.name}`} href={at('series')} />
          ) : null}
          <TextLink
            standing
            label="Raw files"
            ariaLabel={`Raw files of ${station.name}, ${formatCount(summary.rawFiles)}`}
            href={at('raw-files')}
          />
          <TextLink standing label="Set-up" ariaLabel={`Set-up of ${station.name}`} href={at('set-up')} />
          <TextLink standing label="Runs" ariaLabel={`Runs of ${station.name}`} href={at('runs')} />
        </View>
      </View>
    </View>
  );
}
