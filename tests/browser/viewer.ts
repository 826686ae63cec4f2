/** One Chromium window on the page of a house: what it asks for, what the browser complains about, what it shows. */
import type { Browser, Page } from 'playwright-core';
import { launchChromium } from './chromium.ts';

export interface Viewer {
  readonly page: Page;
  /** What the browser complained about; a test that provokes complaints takes them out. */
  complaints: string[];
  /** Every address that was asked for. */
  readonly asked: string[];
  /** Loads the page afresh and waits until it is drawn. */
  open(pageUrl: string, view: string, width?: number, height?: number): Promise<void>;
  text(selector: string): Promise<string>;
  /** The unrounded figures that the page carries for machines, in its order. */
  figures(selector: string): Promise<number[]>;
  close(): Promise<void>;
}

export async function openViewer(): Promise<Viewer> {
  const browser: Browser = await launchChromium();
  const page = await (await browser.newContext()).newPage();
  const viewer: Viewer = {
    page,
    complaints: [],
    asked: [],
    async open(pageUrl, view, width = 1280, height = 900) {
      await page.setViewportSize({ width, height });
      await page.goto('about:blank');
      await page.goto(`${pageUrl}#/${view}`);
      await page.locator('main h1').waitFor();
    },
    text: async (selector) => (await page.locator(selector).innerText()).replaceAll('\n', ' '),
    figures: (selector) =>
      page
        .locator(`${selector} data`)
        .evaluateAll((all) => all.map((one) => Number(one.getAttribute('value')))),
    close: () => browser.close(),
  };
  page.on('pageerror', (error) => viewer.complaints.push(error.message));
  page.on('console', (message) => {
    if (message.type() === 'error') viewer.complaints.push(message.text());
  });
  page.on('request', (request) => viewer.asked.push(request.url()));
  return viewer;
}
