import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { Visit, accountOf, group, keepPictures, launch } from './visit';

let browser: Browser;
beforeAll(async () => {
  browser = await launch();
});
afterAll(() => browser.close());
keepPictures();

/** Chromium writes a line for every refused request; these two refusals belong here. */
const refusals = /status of 401 .*\/api\/(me|auth\/sign-in\/email)$/;

describe.each(['phone', 'wide'] as const)('signing in, %s', (size) => {
  it('leads from the form to the stations of the group', async () => {
    const visit = await Visit.begin(browser, { size });
    const { page } = visit;
    await visit.open('/');
    await page.waitForURL(/\/sign-in/);
    const { email, password } = accountOf('lead');
    await page.getByLabel('E-mail').fill(email);
    await page.getByLabel('Password', { exact: true }).fill(password);
    await page.getByLabel('Password', { exact: true }).press('Enter');
    await page.waitForURL(new RegExp(`/g/${group}$`));
    await visit.settled();
    expect(await page.getByRole('main').innerText()).toContain('Hollin Fen');
    expect(visit.complaints.filter((words) => !refusals.test(words))).toEqual([]);
    await visit.end();
  });

  it('says so when address and password do not belong together, and stays', async () => {
    const visit = await Visit.begin(browser, { size });
    const { page } = visit;
    await visit.open('/sign-in');
    await page.getByLabel('E-mail').fill(accountOf('lead').email);
    await page.getByLabel('Password', { exact: true }).fill('not the password');
    await visit.press('Sign in');
    await page.getByText('This e-mail address and password do not belong together.').waitFor();
    expect(new URL(page.url()).pathname).toBe('/sign-in');
    expect(visit.complaints.filter((words) => !refusals.test(words))).toEqual([]);
    await visit.end();
  });
});

it('takes one press on a demonstration sign-in, and leads to the page that was asked for', async () => {
  const visit = await Visit.begin(browser, { size: 'wide' });
  const { page } = visit;
  await visit.open(`/g/${group}/recipes`);
  await page.waitForURL(/\/sign-in\?next=/);
  await visit.press(new RegExp(`^${accountOf('technician').name}`));
  await page.waitForURL(new RegExp(`/g/${group}/recipes$`));
  await visit.settled();
  await page.getByRole('button', { name: new RegExp(accountOf('technician').name) }).waitFor();
  await visit.end();
});
