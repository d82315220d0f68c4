import { randomUUID } from 'node:crypto';
import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Run, SeriesData } from '../../server/contract/api';
import { headingCount, seriousFindings, sidewaysPx } from './page-checks';
import { makeRawRecords } from './raw-records';
import type { RawRecords } from './raw-records';
import { Visit, demoStation, group, keepPictures, launch, serverUrl, stationPage } from './visit';
import type { Size } from './visit';

/** Each page, as it stands with the demonstration, against what must hold of any page. */

const emptyStation = 'quillet-wood';
let browser: Browser;
let records: RawRecords;
let periodStartMs: number;
beforeAll(async () => {
  [browser, records] = await Promise.all([launch(), makeRawRecords()]);
  const visit = await Visit.begin(browser, { size: 'wide', role: 'lead' });
  const answer = await visit.context.request.post(`/api/groups/${group}/stations`, {
    headers: { origin: serverUrl() },
    data: {
      id: randomUUID(),
      systemId: randomUUID(),
      setUpId: randomUUID(),
      station: {
        schema: 'gustbook/station/1',
        name: 'Quillet Wood',
        slug: emptyStation,
        description: 'Invented.',
        utcOffsetMinutes: 60,
        invented: true,
      },
      setUp: records.setUp,
    },
  });
  expect(answer.status()).toBe(201);
  const [run] = await visit.get<Run[]>(`/stations/${demoStation}/runs`);
  const { startMs, grades } = await visit.get<SeriesData>(`/runs/${run.id}/series?quantities=co2Flux`);
  // a half hour with something to say
  periodStartMs = startMs[grades.co2Flux.indexOf(2)];
  await visit.end();
});
afterAll(async () => {
  await browser.close();
  await records.remove();
});
keepPictures();

interface PageState {
  path: () => string;
  /** Opens it without an account. */
  isGuest?: boolean;
  /** Brings the page into the state that is looked at. */
  prepare?: (visit: Visit) => Promise<void>;
}

const states: Record<string, PageState> = {
  'sign-in': { path: () => '/sign-in', isGuest: true },
  stations: { path: () => `/g/${group}` },
  'new station': { path: () => `/g/${group}/new-station` },
  'new station with faults': {
    path: () => `/g/${group}/new-station`,
    prepare: async (visit) => {
      await visit.press('Make the station');
      await visit.page.getByText('Give the station a name.').waitFor();
    },
  },
  'set-up': { path: () => stationPage(demoStation, 'set-up') },
  'raw files, none yet': { path: () => stationPage(emptyStation, 'raw-files') },
  'raw files with a proposal': {
    path: () => stationPage(emptyStation, 'raw-files'),
    prepare: async ({ page }) => {
      await page.getByLabel('Choose raw files').setInputFiles([records.plain, records.packed]);
      await page.getByRole('list', { name: 'Quantities and their columns' }).waitFor();
    },
  },
  'raw files': { path: () => stationPage(demoStation, 'raw-files') },
  runs: { path: () => stationPage(demoStation, 'runs') },
  'runs, asking what to compute': {
    path: () => stationPage(demoStation, 'runs'),
    prepare: async (visit) => {
      await visit.press('Compute');
      await visit.page.getByRole('dialog').getByLabel('Recipe').waitFor();
    },
  },
  recipes: { path: () => `/g/${group}/recipes` },
  series: {
    path: () => stationPage(demoStation, 'series'),
    prepare: ({ page }) => page.locator('canvas').first().waitFor(),
  },
  period: { path: () => stationPage(demoStation, `period/${periodStartMs}`) },
};
const names = Object.keys(states);

/** Pages are opened in one window after another, so that the scripts come from its cache as they do for a reader. */
function windowOf(size: Size, colours: 'light' | 'dark') {
  let guest: Visit;
  let reader: Visit;
  beforeAll(async () => {
    guest = await Visit.begin(browser, { size, colours });
    reader = await Visit.begin(browser, { size, colours, role: 'lead' });
  });
  afterAll(async () => {
    await guest?.end();
    await reader?.end();
  });
  return async (name: string): Promise<Visit> => {
    const { path, isGuest, prepare } = states[name];
    const visit = (isGuest ? guest : reader).inSight();
    visit.complaints.length = 0;
    await visit.open(path());
    await prepare?.(visit);
    return visit;
  };
}

describe.each(['phone', 'wide'] as const)('each page, %s', (size) => {
  const look = windowOf(size, 'light');
  it.each(names)('%s: accessible, one heading, no sideways scroll, no complaint', async (name) => {
    const visit = await look(name);
    expect(await seriousFindings(visit)).toEqual([]);
    expect(await headingCount(visit)).toBe(1);
    expect(await sidewaysPx(visit)).toBeLessThanOrEqual(0);
    expect(visit.complaints).toEqual([]);
  });
});

describe('each page in dark colours', () => {
  const look = windowOf('wide', 'dark');
  it.each(names)('%s: enough contrast', async (name) => {
    expect(await seriousFindings(await look(name), 'colours')).toEqual([]);
  });
});
