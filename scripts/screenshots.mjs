/**
 * Screenshots of the invented demonstration.
 *
 * node scripts/screenshots.mjs [--out DIR] [--url http://127.0.0.1:4310]
 *
 * Without --out only docs/series.png is written, which the README shows; with it every page at both sizes, light and dark, too.
 * Without --url a server of its own is started.
 */
import { mkdir, stat } from 'node:fs/promises';
import { join } from 'node:path';
import { parseArgs } from 'node:util';
import { buildServer } from './build-server.mjs';
import { buildWeb } from './build-web.mjs';
import { launchChromium } from './chromium.mjs';
import { startDemoServer } from './demo-server.mjs';
import { root } from './prepare.mjs';

const { values } = parseArgs({ options: { out: { type: 'string' }, url: { type: 'string' } } });
const sizes = { wide: { width: 1440, height: 900 }, phone: { width: 390, height: 844 } };

let server = null;
let url = values.url;
if (!url) {
  await buildServer();
  await buildWeb();
  server = await startDemoServer();
  url = server.url;
}
const browser = await launchChromium();

async function signedIn(size, colorScheme, role) {
  const context = await browser.newContext({
    baseURL: url,
    viewport: sizes[size],
    colorScheme,
    reducedMotion: 'reduce',
    ...(size === 'phone' ? { isMobile: true, hasTouch: true } : {}),
  });
  const health = await (await context.request.get('/api/health')).json();
  const account = health.demo.signIns.find((one) => one.role === role);
  await context.request.post('/api/auth/sign-in/email', {
    headers: { origin: url },
    data: { email: account.email, password: account.password },
  });
  return context;
}

/** Opens a page and waits until nothing is being read and nothing moves. */
async function open(page, path) {
  await page.goto(path);
  await page.locator('h1').first().waitFor();
  await page.waitForFunction(
    () =>
      document.fonts.status === 'loaded' &&
      !/reading the|Reading the|Opening your book/.test(document.body.textContent ?? ''),
  );
  await page.evaluate(
    () => new Promise((done) => requestAnimationFrame(() => requestAnimationFrame(() => done(null)))),
  );
}

try {
  {
    const context = await signedIn('wide', 'light', 'lead');
    const page = await context.newPage();
    await open(page, '/g/lowmere/s/hollin-fen/series');
    await page.locator('canvas').first().waitFor();
    const path = join(root, 'docs', 'series.png');
    await mkdir(join(root, 'docs'), { recursive: true });
    await page.screenshot({ path });
    console.log(`docs/series.png, ${Math.round((await stat(path)).size / 1024)} KB`);
    await context.close();
  }
  if (values.out) {
    await mkdir(values.out, { recursive: true });
    for (const size of ['wide', 'phone']) {
      for (const colours of ['light', 'dark']) {
        const guest = await browser.newContext({
          baseURL: url,
          viewport: sizes[size],
          colorScheme: colours,
        });
        const signIn = await guest.newPage();
        await open(signIn, '/sign-in');
        await signIn.screenshot({ path: join(values.out, `sign-in-${size}-${colours}.png`), fullPage: true });
        await guest.close();
        const context = await signedIn(size, colours, 'lead');
        const page = await context.newPage();
        const get = async (path) => (await context.request.get(path)).json();
        const [run] = await get('/api/groups/lowmere/stations/hollin-fen/runs');
        const periods = await get(`/api/groups/lowmere/runs/${run.id}/periods`);
        const station = '/g/lowmere/s/hollin-fen';
        const startOf = (time) =>
          periods.find((row) => new Date(row.startMs + 3_600_000).toISOString().slice(11, 16) === time)
            .startMs;
        const pages = {
          stations: '/g/lowmere',
          'new-station': '/g/lowmere/new-station',
          'set-up': `${station}/set-up`,
          'raw-files': `${station}/raw-files`,
          runs: `${station}/runs`,
          recipes: '/g/lowmere/recipes',
          series: `${station}/series`,
          'period-gust-front': `${station}/period/${startOf('14:30')}`,
          'period-good': `${station}/period/${startOf('11:00')}`,
          'period-stopped': `${station}/period/${startOf('21:30')}`,
        };
        for (const [name, path] of Object.entries(pages)) {
          await open(page, path);
          await page.screenshot({
            path: join(values.out, `${name}-${size}-${colours}.png`),
            fullPage: true,
          });
        }
        await context.close();
      }
    }
    console.log(`All pages: ${values.out}`);
  }
} finally {
  await browser.close();
  await server?.stop();
}
