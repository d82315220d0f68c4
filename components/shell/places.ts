export type Place = 'stations' | 'series' | 'raw-files' | 'set-up' | 'runs' | 'recipes';

export interface PlaceLink {
  place: Place;
  label: string;
  href: string;
}

export function groupPath(groupSlug: string): string {
  return `/g/${encodeURIComponent(groupSlug)}`;
}

export function stationPath(groupSlug: string, stationSlug: string, place: string): string {
  return `${groupPath(groupSlug)}/s/${encodeURIComponent(stationSlug)}/${place}`;
}

/** The evidence of one period; start in ms since 1970 UTC. */
export function periodPath(groupSlug: string, stationSlug: string, startMs: number): string {
  return stationPath(groupSlug, stationSlug, `period/${startMs}`);
}

/** Where one can go from here: the group's places, and the station's where one is open. */
export function placesOf(groupSlug: string, stationSlug: string | undefined): PlaceLink[] {
  const places: PlaceLink[] = [{ place: 'stations', label: 'Stations', href: groupPath(groupSlug) }];
  if (stationSlug !== undefined) {
    places.push(
      { place: 'series', label: 'Series', href: stationPath(groupSlug, stationSlug, 'series') },
      { place: 'raw-files', label: 'Raw files', href: stationPath(groupSlug, stationSlug, 'raw-files') },
      { place: 'set-up', label: 'Set-up', href: stationPath(groupSlug, stationSlug, 'set-up') },
      { place: 'runs', label: 'Runs', href: stationPath(groupSlug, stationSlug, 'runs') },
    );
  }
  places.push({ place: 'recipes', label: 'Recipes', href: `${groupPath(groupSlug)}/recipes` });
  return places;
}
