import { randomUUID } from 'node:crypto';
import type { APIResponse, Browser } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { RawFile, Run } from '../../server/contract/api';
import { Visit, demoStation, group, keepPictures, launch, serverUrl, stationPage } from './visit';

let browser: Browser;
beforeAll(async () => {
  browser = await launch();
});
afterAll(() => browser.close());
keepPictures();

describe.each(['phone', 'wide'] as const)('a student, %s', (size) => {
  it('reads and exports, and sees nothing that brings in, changes, computes or deletes', async () => {
    const visit = await Visit.begin(browser, { size, role: 'student' });
    const { page } = visit;
    const changes =
      /^(new station|make the first|compute|recompute|correct|write the set-up|delete|withdraw|bring back|read again|save)/i;
    for (const path of [
      `/g/${group}`,
      ...['series', 'raw-files', 'set-up', 'runs'].map((place) => stationPage(demoStation, place)),
      `/g/${group}/recipes`,
    ]) {
      await visit.open(path);
      const controls = await visit.control(/./).allInnerTexts();
      expect(controls.length).toBeGreaterThan(0);
      expect({ path, found: controls.filter((words) => changes.test(words.trim())) }).toEqual({
        path,
        found: [],
      });
    }
    await visit.open(stationPage(demoStation, 'raw-files'));
    for (const input of await page.locator('input[type=file]').all())
      expect(await input.isDisabled()).toBe(true);
    await visit.press(/^Details of /);
    const sheet = page.getByRole('dialog');
    await sheet.getByRole('link', { name: 'Download' }).waitFor();
    const offered = await visit.control(/./, sheet).allInnerTexts();
    expect(offered.filter((words) => changes.test(words.trim()))).toEqual([]);
    await visit.open(stationPage(demoStation, 'series'));
    await visit.press('Export');
    await page
      .getByRole('dialog')
      .getByRole('link', { name: /exchange CSV/ })
      .waitFor();
    expect(visit.complaints).toEqual([]);
    await visit.end();
  });
});

it('refuses a student who goes around the pages', async () => {
  const visit = await Visit.begin(browser, { size: 'wide', role: 'student' });
  const [file] = await visit.get<RawFile[]>(`/stations/${demoStation}/raw-files`);
  const [run] = await visit.get<Run[]>(`/stations/${demoStation}/runs`);
  const { request } = visit.context;
  const at = (path: string) => `/api/groups/${group}${path}`;
  const headers = { origin: serverUrl() };
  const refused: Record<string, APIResponse> = {
    upload: await request.post(at(`/stations/${demoStation}/raw-files`), {
      headers,
      multipart: {
        id: randomUUID(),
        layoutId: file.layoutId,
        file: { name: 'mine.csv', mimeType: 'text/csv', buffer: Buffer.from('time,w\n') },
      },
    }),
    withdraw: await request.post(at(`/raw-files/${file.id}/withdraw`), { headers }),
    compute: await request.post(at(`/stations/${demoStation}/runs`), {
      headers,
      data: { id: randomUUID(), recipeHash: run.recipeHash, fromMs: null, toMs: null },
    }),
    'delete run': await request.delete(at(`/runs/${run.id}?confirm=x`), { headers }),
    'delete station': await request.delete(at(`/stations/${demoStation}?confirm=x`), { headers }),
  };
  for (const [what, answer] of Object.entries(refused)) {
    expect([what, answer.status()]).toEqual([what, 403]);
    expect(((await answer.json()) as { error: { code: string } }).error.code).toBe('not_allowed');
  }
  expect(
    (await visit.get<RawFile[]>(`/stations/${demoStation}/raw-files`)).map(({ state }) => state),
  ).not.toContain('withdrawn');
  expect((await visit.get<Run[]>(`/stations/${demoStation}/runs`)).map(({ id }) => id)).toContain(run.id);
  await visit.end();
});
