/** The browser of these tests: Debian's own Chromium, headless. Where it is missing the tests say so and are skipped. */
import { existsSync } from 'node:fs';
import { chromium, type Browser } from 'playwright-core';

const EXECUTABLE = '/usr/bin/chromium';
const FLAGS = [
  '--headless',
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
];

export const hasChromium = existsSync(EXECUTABLE);
if (!hasChromium) {
  console.warn(
    `SKIPPED: the browser tests need ${EXECUTABLE}, which is not there; install the package "chromium".`,
  );
}

export function launchChromium(): Promise<Browser> {
  return chromium.launch({ executablePath: EXECUTABLE, args: FLAGS });
}
