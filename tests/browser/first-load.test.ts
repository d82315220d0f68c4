import { gzipSync } from 'node:zlib';
import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, expect, it } from 'vitest';
import { Visit, group, keepPictures, launch } from './visit';

let browser: Browser;
beforeAll(async () => {
  browser = await launch();
});
afterAll(() => browser.close());
keepPictures();

/** What a first visit over a slow field connection may cost [bytes of packed JavaScript]. */
const budgetBytes = 450_000;

it('brings the signed-in home page up with less than 450 kB of packed JavaScript', async () => {
  const visit = await Visit.begin(browser, { size: 'phone', role: 'technician' });
  const { page } = visit;
  const scripts: { path: string; bytes: Promise<number> }[] = [];
  page.on('response', (response) => {
    const isScript =
      response.request().resourceType() === 'script' ||
      /javascript/.test(response.headers()['content-type'] ?? '');
    if (!isScript) return;
    scripts.push({
      path: new URL(response.url()).pathname,
      bytes: response.body().then((body) => gzipSync(body, { level: 6 }).length),
    });
  });
  await visit.open('/');
  await page.waitForURL(new RegExp(`/g/${group}$`));
  await page.getByRole('main').getByText('Hollin Fen', { exact: true }).first().waitFor();
  // what the page asks for once it is idle belongs to the first load too
  await page.evaluate(() => new Promise((done) => requestIdleCallback(() => done(null))));
  const sizes = await Promise.all(scripts.map(async ({ path, bytes }) => ({ path, bytes: await bytes })));
  const total = sizes.reduce((sum, { bytes }) => sum + bytes, 0);
  const kilobytes = (bytes: number) => `${(bytes / 1000).toFixed(1).padStart(7)} kB`;
  for (const { path, bytes } of sizes) process.stdout.write(`${kilobytes(bytes)}  ${path}\n`);
  process.stdout.write(`${kilobytes(total)} of packed JavaScript in ${sizes.length} files\n`);
  expect(sizes.length).toBeGreaterThan(0);
  expect(new Set(sizes.map(({ path }) => path)).size).toBe(sizes.length);
  expect(total).toBeLessThan(budgetBytes);
  expect(visit.complaints).toEqual([]);
  await visit.end();
});
