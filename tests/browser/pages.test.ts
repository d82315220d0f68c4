import { randomUUID } from 'node:crypto';
import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Run, SeriesData } from '../../server/contract/api';
import { headingCount, seriousFindings, sidewaysPx } from './page-checks';
import { makeRawRecords } from './raw-records';
import type { RawRecords } from './raw-records';
import { Visit, demoStation, group, keepPictures, launch, serverUrl, stationPage } from './visit';

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

describe.each(['phone', 'wide'] as const)('each page, %s', (size) => {
  // One window for all, so that the scripts come from its cache as they do for a reader.
  let guest: Visit;
  let reader: Visit;
  beforeAll(async () => {
    guest = await Visit.begin(browser, { size });
    reader = await Visit.begin(browser, { size, role: 'lead' });
  });
  afterAll(async () => {
    await guest?.end();
    await reader?.end();
  });

  it.each(names)('%s: accessible, one heading, no sideways scroll, no complaint', async (name) => {
    const { path, isGuest, prepare } = states[name];
    const visit = (isGuest ? guest : reader).inSight();
    visit.complaints.length = 0;
    await visit.open(path());
    await prepare?.(visit);
    expect(await seriousFindings(visit)).toEqual([]);
    expect(await headingCount(visit)).toBe(1);
    expect(await sidewaysPx(visit)).toBeLessThanOrEqual(0);
    if (size === 'wide') {
      await darken(visit);
      expect(await seriousFindings(visit, 'colours')).toEqual([]);
      await visit.page.emulateMedia({ colorScheme: 'light' });
    }
    expect(visit.complaints).toEqual([]);
  });
});

/** The device turns dark, and the page with it. */
async function darken({ page }: Visit): Promise<void> {
  const ground = () =>
    page
      .getByRole('main')
      .first()
      .evaluate((sheet) => getComputedStyle(sheet).backgroundColor);
  const before = await ground();
  await page.emulateMedia({ colorScheme: 'dark' });
  await expect.poll(ground).not.toBe(before);
}
