import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, expect, it } from 'vitest';
import { Visit, demoStation, keepPictures, launch, stationPage } from './visit';

let browser: Browser;
beforeAll(async () => {
  browser = await launch();
});
afterAll(() => browser.close());
keepPictures();

const halfHourMs = 1_800_000;
const startIn = (url: string): number => Number(/\/period\/(\d+)/.exec(url)?.[1]);

it('walks the series with the arrow keys, opens a half hour with Enter and goes on with [ and ]', async () => {
  const visit = await Visit.begin(browser, { size: 'wide', role: 'student' });
  const { page } = visit;
  const series = stationPage(demoStation, 'series');
  await visit.open(series);
  await page
    .getByRole('link', { name: 'Open this period' })
    .or(page.getByRole('button', { name: 'Open this period' }))
    .first()
    .waitFor();
  await page.keyboard.press('Enter');
  await page.waitForURL(/\/period\//);
  const first = startIn(page.url());
  await page.goBack();
  await page.waitForURL(/\/series/);
  await visit.settled();

  await page.keyboard.press('ArrowLeft');
  await page.keyboard.press('ArrowLeft');
  await page.keyboard.press('ArrowLeft');
  await page.keyboard.press('ArrowRight');
  await page.keyboard.press('Enter');
  await page.waitForURL(new RegExp(`/period/${first - 2 * halfHourMs}\\b`));
  await visit.settled();
  const there = await visit.heading();

  await page.keyboard.press(']');
  await page.waitForURL(new RegExp(`/period/${first - halfHourMs}\\b`));
  await visit.settled();
  expect(await visit.heading()).not.toBe(there);
  await page.keyboard.press('[');
  await page.waitForURL(new RegExp(`/period/${first - 2 * halfHourMs}\\b`));
  await expect.poll(() => visit.heading()).toBe(there);
  expect(visit.complaints).toEqual([]);
  await visit.end();
});

it('reaches the page, and each control in sight, with Tab alone', async () => {
  const visit = await Visit.begin(browser, { size: 'wide', role: 'lead' });
  const { page } = visit;
  await visit.open(stationPage(demoStation, 'runs'));
  await page.keyboard.press('Tab');
  expect(await page.evaluate(() => document.activeElement?.textContent)).toBe('Skip to the page');
  await page.keyboard.press('Enter');
  expect(await page.evaluate(() => document.activeElement?.id)).toBe('main');
  await page.keyboard.press('Tab');
  expect(await page.evaluate(() => document.activeElement?.textContent)).toBe('Compute');
  await page.keyboard.press('Enter');
  await page.getByRole('dialog', { name: 'Compute fluxes' }).waitFor();
  await page.keyboard.press('Escape');
  await page.getByRole('dialog').waitFor({ state: 'detached' });
  // focus is back where it was
  expect(await page.evaluate(() => document.activeElement?.textContent)).toBe('Compute');
  await visit.end();
});
