import { readFileSync } from 'node:fs';
import { basename } from 'node:path';
import type { Browser, Download, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { PeriodDetail, PeriodRow, RawFile, Run, SeriesData } from '../../server/contract/api';
import { makeRawRecords } from './raw-records';
import type { RawRecords } from './raw-records';
import { Visit, accountOf, group, keepPictures, launch, stationPage } from './visit';

/** From an account to exported fluxes, as a person walks it, on a phone and on a desk. */

let browser: Browser;
let records: RawRecords;
beforeAll(async () => {
  [browser, records] = await Promise.all([launch(), makeRawRecords()]);
});
afterAll(async () => {
  await browser.close();
  await records.remove();
});
keepPictures();

/** 17 June 2027, 17:00 in station time, UTC+1. */
const firstMs = Date.UTC(2027, 5, 17, 16);
const halfHourMs = 1_800_000;

/** Rows of cells of a comma separated text (RFC 4180). */
function cellsOf(text: string): string[][] {
  return text
    .trimEnd()
    .split(/\r?\n/)
    .map((line) =>
      [...line.matchAll(/("(?:[^"]|"")*"|[^,]*)(?:,|$)/g)]
        .map(([, cell]) => (cell.startsWith('"') ? cell.slice(1, -1).replaceAll('""', '"') : cell))
        .slice(0, line.endsWith(',') ? undefined : -1),
    );
}

async function textOf(download: Download): Promise<string> {
  return readFileSync(await download.path(), 'utf8');
}

/** Puts files down on the drop target, as a file manager does. */
async function drop(page: Page, paths: readonly string[]): Promise<void> {
  const files = paths.map((path) => ({
    name: basename(path),
    base64: readFileSync(path).toString('base64'),
  }));
  const transfer = await page.evaluateHandle((given) => {
    const made = new DataTransfer();
    for (const { name, base64 } of given) {
      made.items.add(new File([Uint8Array.from(atob(base64), (letter) => letter.charCodeAt(0))], name));
    }
    return made;
  }, files);
  const target = page.locator('label', { has: page.getByLabel('Choose raw files') });
  await target.dispatchEvent('dragover', { dataTransfer: transfer });
  await target.dispatchEvent('drop', { dataTransfer: transfer });
}

/** Confirms what the proposal asks to be looked at, and sends. */
async function send(visit: Visit): Promise<void> {
  const { page } = visit;
  const button = page.getByRole('button', { name: /^Send \d+ files?$/ });
  const looked = page.getByRole('checkbox', { name: /I have looked/ });
  await button.or(looked).first().waitFor();
  if ((await looked.count()) > 0) await looked.check();
  await button.click();
}

describe.each(['phone', 'wide'] as const)('the way from a new station to exported fluxes, %s', (size) => {
  const station = `ostrey-bank-${size}`;
  let visit: Visit;
  let page: Page;
  let run: Run;
  let plainName: string;
  let packedName: string;
  afterAll(() => visit?.end());

  it('begins with signing in', async () => {
    visit = await Visit.begin(browser, { size });
    page = visit.page;
    await visit.open('/sign-in');
    const { email, password } = accountOf('analyst');
    await page.getByLabel('E-mail').fill(email);
    await page.getByLabel('Password', { exact: true }).fill(password);
    await visit.press('Sign in');
    await page.waitForURL(new RegExp(`/g/${group}$`));
    await visit.settled();
    // from here on the page must not complain about anything
    visit.complaints.length = 0;
  });

  it('asks for what is missing in a new station, and makes it once all is there', async () => {
    await visit.press('New station');
    await page.getByRole('heading', { level: 1, name: 'New station' }).waitFor();
    await visit.press('Make the station');
    await page.getByText('Give the station a name.').waitFor();
    await page.getByText('Some fields are missing or out of range.').waitFor();
    const name = page.getByRole('textbox', { name: 'Name', exact: true });
    expect(await name.getAttribute('aria-invalid')).toBe('true');
    expect(await name.evaluate((field) => field === document.activeElement)).toBe(true);
    expect((await visit.get<unknown[]>('/stations')).length).toBeGreaterThan(0);

    await name.fill('Ostrey Bank');
    await page.getByRole('textbox', { name: 'Short form' }).fill(station);
    await page.getByLabel('Station standard time').selectOption({ label: 'UTC+1' });
    const numbers: [RegExp, string][] = [
      [/^Latitude/, '53.1'],
      [/^Longitude/, '9,2'],
      [/^Elevation of the ground/, '12'],
      [/^Canopy height/, '0.45'],
      [/^Sonic, middle of its paths/, '3.2'],
      [/^Boom points to/, '225'],
      [/^Behind the mast/, '45'],
      [/^Path length/, '0.1'],
      [/^Optical path/, '0.125'],
      [/^From the sonic, north/, '0.12'],
      [/^From the sonic, east/, '−0.13'],
      [/^Sampling rate/, '5'],
    ];
    for (const [label, value] of numbers) await page.getByRole('textbox', { name: label }).fill(value);
    // two thirds and a tenth of 0.45 m
    await visit.press(/^Take 0\.3 m/);
    await visit.press(/^Take 0\.045 m/);
    await page.getByLabel('Side wind already corrected').selectOption('yes');
    await visit.press('Make the station');
    await page.waitForURL(new RegExp(`${stationPage(station, 'raw-files')}$`));

    const made = await visit.get<{ setUp: { setUp: Record<string, unknown> }; rawFiles: number }>(
      `/stations/${station}`,
    );
    expect(made.setUp.setUp).toMatchObject({
      latitudeDeg: 53.1,
      longitudeDeg: 9.2,
      displacementM: 0.3,
      roughnessM: 0.045,
      boomAzimuthDeg: 225,
      separation: { northM: 0.12, eastM: -0.13, upM: 0 },
      sampleRateHz: 5,
    });
    expect(made.rawFiles).toBe(0);
  });

  it('proposes which column holds which quantity before anything is sent', async () => {
    await page.getByRole('heading', { level: 1, name: 'Bring in raw files' }).waitFor();
    plainName = basename(records.plain);
    packedName = basename(records.packed);
    const paths = [records.plain, records.packed];
    if (visit.isWide) await drop(page, paths);
    else await page.getByLabel('Choose raw files').setInputFiles(paths);
    const list = page.getByRole('list', { name: 'Quantities and their columns' });
    await list.waitFor();
    // what the generator writes into the header and the unit row of its files
    const expected: [quantity: RegExp, column: string, unit: RegExp][] = [
      [/vertical wind|wind w/, 'wind_z', /m\ss/],
      [/sonic temperature/, 'sonic_t', /degC|°C/],
      [/CO2/, 'co2_dens', /mmol\sm/],
      [/H2O/, 'h2o_dens', /mmol\sm/],
      [/air pressure/, 'press', /kPa/],
      [/sonic status/, 'sonic_status', /code/],
      [/analyser status/, 'analyser_status', /code/],
      [/signal strength/, 'signal', /%/],
    ];
    const lines = (await list.getByRole('listitem').allInnerTexts()).map((text) => text.replace(/\s+/g, ' '));
    for (const [quantity, column, unit] of expected) {
      const line = lines.find((text) => text.includes(` ${column},`) || text.includes(`${column},`));
      expect(line?.replace(/(CO|H) 2( O)?/g, '$12$2').replace('H2 O', 'H2O')).toMatch(quantity);
      expect(line).toMatch(unit);
    }
    for (const name of [plainName, packedName]) {
      await page.getByRole('list', { name: 'Chosen files' }).getByText(name).waitFor();
    }
    expect(await visit.get<RawFile[]>(`/stations/${station}/raw-files`)).toEqual([]);
  });

  it('sends a plain and a packed file and shows both read', async () => {
    await page.getByLabel('When all is read, compute with').selectOption({ label: 'nothing yet' });
    await send(visit);
    const sent = page.getByRole('region', { name: 'Sent' });
    await sent.getByText('2 of 2 files kept').waitFor();
    await page.getByText('36 000 rows in use').or(page.getByText('36\u202f000 rows in use')).waitFor();
    for (const name of [plainName, packedName]) {
      const row = visit.isWide
        ? page.getByRole('table', { name: 'Raw files' }).getByRole('row').filter({ hasText: name })
        : page.getByRole('listitem').filter({ has: page.getByLabel(`Details of ${name}`) });
      await row.getByText(/^read(,|$)/).waitFor();
    }
    const files = await visit.get<RawFile[]>(`/stations/${station}/raw-files`);
    // two hours of 3600 s at 5 Hz in two files, none lost
    expect(
      files.map(({ fileName, state, rows, badRows }) => [fileName, state, rows, badRows]).sort(),
    ).toEqual([
      [plainName, 'read', 18_000, 0],
      [packedName, 'read', 18_000, 0],
    ]);
  });

  it('computes, and the half hours appear in a window that was open before', async () => {
    const onlooker = await visit.context.newPage();
    await onlooker.goto(stationPage(station, 'series'));
    await onlooker.getByRole('heading', { name: 'Nothing computed yet' }).waitFor();

    await visit.press('Compute');
    await page.getByRole('dialog').getByRole('button', { name: 'Compute' }).click();
    await page.waitForURL(new RegExp(`${stationPage(station, 'runs')}$`));
    const item = page.getByRole('list', { name: 'Runs, newest first' }).getByRole('listitem').first();
    await item.getByText('done', { exact: true }).waitFor();
    await item.getByText(/^4 periods/).waitFor();

    await onlooker.getByText(/^4 periods in view/).waitFor();
    // the rainy half hour, which every view of the table lists
    await onlooker
      .getByRole('link', { name: /18:30.19:00/ })
      .first()
      .waitFor();
    await onlooker.close();

    [run] = await visit.get<Run[]>(`/stations/${station}/runs`);
    expect([run.state, run.periodsDone, run.stale]).toEqual(['done', 4, []]);
  });

  it('leads from the run to its series, and from there into a half hour with the reason of its grade', async () => {
    await visit.press(`Open series of run ${run.number}`);
    await page.getByText(/^4 periods in view/).waitFor();
    expect(await page.locator('canvas').count()).toBeGreaterThanOrEqual(4);
    const rainyMs = firstMs + 3 * halfHourMs;
    const detail = await visit.get<PeriodDetail>(`/runs/${run.id}/periods/${rainyMs}`);
    const deciding = detail.reasons.find(
      ({ key, grade }) => grade === 2 && detail.grades.co2Flux.decidedBy.includes(key),
    );
    // 12 of the 30 minutes were rain
    expect(deciding?.finding).toMatch(/^Analyser status bad 40 %$/);

    await page
      .getByRole('link', { name: /18:30.19:00/ })
      .first()
      .click();
    await page.waitForURL(new RegExp(`/period/${rainyMs}`));
    await visit.settled();
    const main = page.getByRole('main');
    await main.getByText('Why FC is graded 2, rejected').waitFor();
    await main.getByText(deciding!.finding, { exact: true }).first().waitFor();
    const words = (await main.innerText()).replace(/\s+/g, ' ').replaceAll('−', '-');
    expect(words).toContain(deciding!.sentence.slice(0, 40));
    expect(words).toContain((detail.values.co2Flux! * 1e6).toFixed(2));
    expect(words).toContain(packedName);
  });

  it('exports both tables with the values that the interface answers', async () => {
    await visit.open(`${stationPage(station, 'series')}?run=${run.id}`);
    const quantities = ['co2Flux', 'latentHeat', 'sensibleHeat', 'ustar', 'airTemperature', 'airPressure'];
    const data = await visit.get<SeriesData>(`/runs/${run.id}/series?quantities=${quantities.join(',')}`);
    const periods = await visit.get<PeriodRow[]>(`/runs/${run.id}/periods`);
    expect(data.startMs).toEqual([0, 1, 2, 3].map((at) => firstMs + at * halfHourMs));
    // the analyser was blocked for two thirds of the third half hour
    expect(data.quantities.co2Flux.map((value) => value === null)).toEqual([false, false, true, false]);

    await visit.press('Export');
    const dialog = page.getByRole('dialog');
    const download = async (label: RegExp) => {
      const [saved] = await Promise.all([
        page.waitForEvent('download'),
        dialog.getByRole('link', { name: label }).click(),
      ]);
      return { name: saved.suggestedFilename(), rows: cellsOf(await textOf(saved)) };
    };

    const exchange = await download(/exchange CSV/);
    expect(exchange.name).toMatch(new RegExp(`^${station}.*exchange\\.csv$`));
    const [names, ...rows] = exchange.rows;
    expect(names.slice(0, 2)).toEqual(['TIMESTAMP_START', 'TIMESTAMP_END']);
    for (const name of ['FC', 'LE', 'H', 'USTAR', 'TAU', 'TA', 'PA', 'WS', 'WD', 'FC_SSITC_TEST'])
      expect(names).toContain(name);
    expect(rows.map(([start, end]) => [start, end])).toEqual([
      ['202706171700', '202706171730'],
      ['202706171730', '202706171800'],
      ['202706171800', '202706171830'],
      ['202706171830', '202706171900'],
    ]);
    for (const row of rows) expect(row).toHaveLength(names.length);
    /** Inner units are SI; the networks want µmol m-2 s-1, °C and kPa. */
    const inExchange: [name: string, quantity: string, convert: (inner: number) => number][] = [
      ['FC', 'co2Flux', (value) => value * 1e6],
      ['LE', 'latentHeat', (value) => value],
      ['H', 'sensibleHeat', (value) => value],
      ['USTAR', 'ustar', (value) => value],
      ['TA', 'airTemperature', (value) => value - 273.15],
      ['PA', 'airPressure', (value) => value / 1000],
    ];
    for (const [name, quantity, convert] of inExchange) {
      rows.forEach((row, at) => {
        const inner = data.quantities[quantity][at];
        const cell = row[names.indexOf(name)];
        if (inner === null) expect(cell).toBe('-9999');
        // a unit conversion costs a rounding or two of 2e-16
        else expect(Math.abs(Number(cell) / convert(inner) - 1)).toBeLessThan(1e-13);
      });
    }
    rows.forEach((row, at) =>
      expect(row[names.indexOf('FC_SSITC_TEST')]).toBe(String(periods[at].grades.co2Flux.ssitc ?? -9999)),
    );

    const plain = await download(/plain CSV/);
    expect(plain.name).toMatch(new RegExp(`^${station}.*plain\\.csv$`));
    const [keys, units, ...lines] = plain.rows;
    expect(units).toHaveLength(keys.length);
    expect(units[keys.indexOf('co2Flux')]).toBe('µmol m-2 s-1');
    expect(units[keys.indexOf('airTemperature')]).toBe('°C');
    expect(lines).toHaveLength(4);
    const start = keys.findIndex((key) => /^start/.test(key));
    expect(lines.map((line) => Date.parse(line[start]))).toEqual(data.startMs);
    for (const [key, convert] of [
      ['co2Flux', (value: number) => value * 1e6],
      ['latentHeat', (value: number) => value],
      ['airTemperature', (value: number) => value - 273.15],
    ] as const) {
      lines.forEach((line, at) => {
        const inner = data.quantities[key][at];
        const cell = line[keys.indexOf(key)];
        if (inner === null) expect(cell).toBe('');
        else expect(Math.abs(Number(cell) / convert(inner) - 1)).toBeLessThan(1e-13);
      });
    }
    lines.forEach((line, at) =>
      expect(line[keys.indexOf('grade.co2Flux')]).toBe(String(periods[at].grades.co2Flux.grade ?? '')),
    );
  });

  it('says of the same file that it is already here', async () => {
    await visit.open(stationPage(station, 'raw-files'));
    await page.getByLabel('Choose raw files').setInputFiles([records.plain]);
    await page.getByText(/^Layout .* fits$/).waitFor();
    await send(visit);
    await page.getByText(/already here, nothing to do/).waitFor();
    expect(await visit.get<RawFile[]>(`/stations/${station}/raw-files`)).toHaveLength(2);
  });

  it('marks the run stale when one of its files is withdrawn', async () => {
    await visit.open(stationPage(station, 'raw-files'));
    await visit.press(`Details of ${packedName}`);
    await page.getByRole('dialog').getByRole('button', { name: 'Withdraw', exact: true }).click();
    const sheet = page.getByRole('dialog');
    await sheet.getByText(new RegExp(`Run ${run.number} uses its time`)).waitFor();
    await sheet.getByRole('button', { name: 'Withdraw it' }).click();
    await page.getByText('withdrawn, not used').waitFor();
    await visit.open(stationPage(station, 'runs'));
    const stale = await visit.get<Run>(`/runs/${run.id}`);
    expect(stale.stale.join(' ')).toContain(packedName);
    await page.getByText(stale.stale[0]).waitFor();
    await visit.control(`Recompute: run ${run.number}`).waitFor();
  });

  it('made the page complain about nothing on the whole way', () => {
    expect(visit.complaints).toEqual([]);
  });
});
