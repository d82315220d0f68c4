import { mkdirSync } from 'node:fs';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import type { Browser, BrowserContext, Locator, Page } from 'playwright-core';
import { afterEach, inject } from 'vitest';
import { demoAccounts } from '../../server/auth/demo-accounts';
import type { Role } from '../../server/contract/roles';
import { projectRoot } from '../../server/paths';

export const sizes = {
  phone: { width: 390, height: 844 },
  wide: { width: 1440, height: 900 },
} as const;
export type Size = keyof typeof sizes;

export const group = 'lowmere';
export const demoStation = 'hollin-fen';
export const stationPage = (station: string, place: string): string => `/g/${group}/s/${station}/${place}`;

export function serverUrl(): string {
  return inject('serverUrl');
}

export function accountOf(role: Role) {
  return demoAccounts.find((account) => account.role === role)!;
}

export async function launch(): Promise<Browser> {
  const { launchChromium } = (await import(
    pathToFileURL(join(projectRoot, 'scripts', 'chromium.mjs')).href
  )) as { launchChromium(): Promise<Browser> };
  return launchChromium();
}

let latest: Visit | null = null;

/** Keeps a picture of the page that a failed test was at. */
export function keepPictures(): void {
  afterEach(async ({ task }) => {
    if (task.result?.state !== 'fail' || latest === null || latest.page.isClosed()) return;
    const folder = join(projectRoot, '.gustbook', 'test-reports', 'browser');
    mkdirSync(folder, { recursive: true });
    const path = join(folder, `${task.name.replace(/[^a-z0-9]+/gi, '-').slice(0, 80)}-${latest.size}.png`);
    await latest.page.screenshot({ path });
    process.stderr.write(`${latest.page.url()} looked like ${path}\n`);
  });
}

/** One reader with one window: what the page complained about is kept. */
export class Visit {
  private constructor(
    readonly size: Size,
    readonly context: BrowserContext,
    readonly page: Page,
    /** Console errors, exceptions and violations of the content security policy, in order. */
    readonly complaints: string[],
  ) {}

  static async begin(
    browser: Browser,
    options: { size: Size; role?: Role; colours?: 'light' | 'dark' },
  ): Promise<Visit> {
    const { size, role, colours = 'light' } = options;
    const context = await browser.newContext({
      baseURL: serverUrl(),
      viewport: sizes[size],
      colorScheme: colours,
      reducedMotion: 'reduce',
      acceptDownloads: true,
      ...(size === 'phone' ? { isMobile: true, hasTouch: true } : {}),
    });
    context.setDefaultTimeout(30_000);
    if (role) {
      const { email, password } = accountOf(role);
      const answer = await context.request.post('/api/auth/sign-in/email', {
        headers: { origin: serverUrl() },
        data: { email, password },
      });
      if (!answer.ok()) throw new Error(`signing in as ${role} answered ${answer.status()}`);
    }
    const complaints: string[] = [];
    await context.exposeFunction('tellTests', (words: string) => complaints.push(words));
    await context.addInitScript(() => {
      document.addEventListener('securitypolicyviolation', (event) => {
        const { tellTests } = globalThis as unknown as { tellTests(words: string): void };
        tellTests(`content security policy: ${event.violatedDirective} ${event.blockedURI}`);
      });
    });
    const page = await context.newPage();
    page.on('pageerror', (error) => complaints.push(`exception: ${error.message}`));
    page.on('console', (message) => {
      if (message.type() === 'error') complaints.push(`console: ${message.text()} ${message.location().url}`);
    });
    latest = new Visit(size, context, page, complaints);
    return latest;
  }

  /** Makes this the window whose picture is kept when a test fails. */
  inSight(): this {
    latest = this;
    return this;
  }

  get isWide(): boolean {
    return this.size === 'wide';
  }

  async open(path: string): Promise<void> {
    await this.page.goto(path);
    await this.settled();
  }

  /** Waits until the page has its heading and reads nothing any more. */
  async settled(): Promise<void> {
    await this.page.locator('h1').first().waitFor({ state: 'attached' });
    await this.page.waitForFunction(
      () =>
        document.fonts.status === 'loaded' &&
        !/reading the |opening your book|reading saved|reading recipes/i.test(
          document.querySelector('[role=main]')?.textContent ?? '',
        ),
    );
  }

  /** A button or a link by its whole name. */
  control(name: string | RegExp, within: Page | Locator = this.page): Locator {
    const options = { name, exact: typeof name === 'string' };
    return within.getByRole('button', options).or(within.getByRole('link', options));
  }

  async press(name: string | RegExp, within?: Page | Locator): Promise<void> {
    await this.control(name, within).first().click();
  }

  /** The one h1. */
  async heading(): Promise<string> {
    return (await this.page.locator('h1').innerText()).replace(/\s+/g, ' ').trim();
  }

  async get<T>(path: string): Promise<T> {
    const answer = await this.context.request.get(`/api/groups/${group}${path}`);
    if (!answer.ok()) throw new Error(`GET ${path} answered ${answer.status()}`);
    return (await answer.json()) as T;
  }

  end(): Promise<void> {
    return this.context.close();
  }
}
