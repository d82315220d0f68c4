import { View } from 'react-native';
import type { ReactNode } from 'react';
import type { StationSummary } from '../../server/contract/api';
import { ApiError } from '../data/api-client';
import { useGroupEvents } from '../data/use-group-events';
import { useStation } from '../data/use-stations';
import { Button, EmptyState, ErrorNotice, LoadingLine, PageBody, PageHead } from '../primitives';
import { AppShell, groupPath } from '../shell';
import type { AppShellProps, Place } from '../shell';

export interface StationPageProps extends Pick<
  AppShellProps,
  'actions' | 'side' | 'sideWidth' | 'chip' | 'offlineText'
> {
  group: string;
  station: string;
  place: Place;
  title: string;
  children: (summary: StationSummary) => ReactNode;
}

/** The frame of a page of one station: header with its name, and what stands there while it is read or cannot be. */
export function StationPage(props: StationPageProps) {
  const { group, station, place, title, children, ...shell } = props;
  useGroupEvents(group);
  const query = useStation(group, station);
  return (
    <AppShell
      {...shell}
      title={title}
      place={place}
      groupSlug={group}
      stationSlug={station}
      stationName={query.data?.station.name}
      stationOffsetMinutes={query.data?.station.utcOffsetMinutes}
    >
      {query.data ? (
        children(query.data)
      ) : (
        <View>
          <PageHead title={title} />
          <PageBody>
            {query.error instanceof ApiError && query.error.status === 404 ? (
              <EmptyState
                title="There is no such station in this group."
                action={<Button label="All stations" href={groupPath(group)} />}
              >
                Its short form may have been mistyped, or the station was deleted.
              </EmptyState>
            ) : query.error ? (
              <ErrorNotice error={query.error} onRetry={() => void query.refetch()} />
            ) : (
              <LoadingLine label="reading the station" />
            )}
          </PageBody>
        </View>
      )}
    </AppShell>
  );
}
