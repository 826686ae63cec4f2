/** One Chromium window on the page, with the made-up evening behind a real server; fresh before each test. */
import type { Browser, Page } from 'playwright-core';
import { afterAll, afterEach, beforeAll, beforeEach, expect } from 'vitest';
import { createWebServer, type WebServer } from '../../src/web/server.ts';
import { createFakeSource, type FakeSource } from '../web/fake-source.ts';
import { launchChromium } from './chromium.ts';
import { buildPage, type BuiltPage } from './page-build.ts';

export const PASSPHRASE = 'melt water at noon';

/** Every sheet, and what is there once it is drawn. */
const SETTLED: Readonly<Record<string, string>> = {
  tonight: '.line.ice.pen',
  nights: '.ledger tbody tr',
  'nights/2026-07-13': 'iframe',
  rehearsal: 'main table',
  plant: 'main tbody tr',
};
export const VIEWS = Object.keys(SETTLED);

const log = { info: () => {}, warn: () => {}, error: () => {} };

export interface Window {
  readonly page: Page;
  readonly source: FakeSource;
  /** What the browser complained about; a test that provokes complaints takes them out. */
  complaints: string[];
  /** Loads the page afresh. */
  open(view: string, width?: number, height?: number): Promise<void>;
  /** Turns to another sheet as a link would. */
  turnTo(view: string): Promise<void>;
  text(selector: string): Promise<string>;
  serve(passphrase: string | null): Promise<void>;
  stop(): Promise<void>;
}

/** Call inside a `describe`; the window is there in its tests. */
export function useWindow(): Window {
  let built: BuiltPage | undefined;
  let browser: Browser | undefined;
  let page: Page;
  let source: FakeSource;
  let server: WebServer;
  let port = 0;
  let loads = 0;

  const at: Window = {
    get page() {
      return page;
    },
    get source() {
      return source;
    },
    complaints: [],
    async open(view, width = 1280, height = 900) {
      loads += 1;
      await page.setViewportSize({ width, height });
      await page.goto(`http://127.0.0.1:${port}/?${loads}#/${view}`);
      await page.locator('main h1').waitFor();
    },
    async turnTo(view) {
      await page.evaluate((hash) => (location.hash = hash), `#/${view}`);
      await page.locator(SETTLED[view]).first().waitFor();
    },
    text: (selector) => page.locator(selector).innerText(),
    async serve(passphrase) {
      const pageDir = built?.pageDir ?? '';
      server = createWebServer({ host: '127.0.0.1', port, pageDir, passphrase, source, log });
      ({ port } = await server.start());
    },
    stop: () => server.stop(),
  };

  beforeAll(async () => {
    built = buildPage();
    browser = await launchChromium();
    page = await (await browser.newContext()).newPage();
    page.on('pageerror', (error) => at.complaints.push(error.message));
    page.on('console', (message) => {
      if (message.type() === 'error') at.complaints.push(message.text());
    });
  }, 60_000);
  afterAll(async () => {
    await browser?.close();
    built?.remove();
  });
  beforeEach(async () => {
    source = createFakeSource();
    at.complaints = [];
    await at.serve(PASSPHRASE);
  });
  afterEach(async () => {
    await page.context().clearCookies();
    await page.evaluate(() => window.localStorage.clear());
    await page.goto('about:blank');
    await server.stop();
    expect(at.complaints).toEqual([]);
  });
  return at;
}
