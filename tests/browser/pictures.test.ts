/**
 * The pictures and the sheet of the README, taken of a simulated house where `RIMEHOLD_PICTURES` names a folder; else
 * nothing is done here. The night is the second one: on the first the estimate begins without knowing the bank.
 */
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import process from 'node:process';
import { expect, it } from 'vitest';
import { storedSheet } from '../../src/daemon/nights.ts';
import { renderText } from '../../src/reports/render-text.ts';
import { MINUTE_MS, noonOf } from '../../src/time.ts';
import { hasChromium } from './chromium.ts';
import { startHouse } from './house.ts';
import { buildPage } from './page-build.ts';
import { openViewer } from './viewer.ts';

const FOLDER = process.env['RIMEHOLD_PICTURES'] ?? '';
const ZONE = 'Europe/Madrid';
const NIGHT = '2026-07-14';
const PHONE = { width: 390, height: 1440 };
const TABLET = { width: 900, height: 1240 };
/** Sizes and themes to look through before a release; only these two pictures are kept. */
const ALL = process.env['RIMEHOLD_ALL_PICTURES'] === undefined ? [] : [320, 768, 1280];

it.runIf(hasChromium && FOLDER !== '')(
  'takes the pictures of the README',
  async () => {
    const built = buildPage();
    const startMs = noonOf(ZONE, '2026-07-13') + 2 * MINUTE_MS;
    const house = await startHouse({ startMs, pageDir: built.pageDir });
    const viewer = await openViewer();
    const { page } = viewer;
    const shot = async (view: string, settled: string, name: string, width: number, height: number) => {
      await viewer.open(house.pageUrl, view, width, height);
      await page.locator(settled).first().waitFor();
      await page.screenshot({ path: join(FOLDER, `${name}.png`), fullPage: name.includes('-') });
    };
    await house.live(4);
    house.clock.advance(1000);
    house.running.daemon.tell('empty', null);
    await house.live(32 * 60 + 34);
    await shot('tonight', '.line.ice.pen', 'tonight', PHONE.width, PHONE.height);
    for (const width of ALL) {
      for (const colorScheme of ['light', 'dark'] as const) {
        await page.emulateMedia({ colorScheme });
        for (const view of ['tonight', 'nights', 'rehearsal', 'plant', 'nights/2026-07-13'])
          await shot(view, 'main h1', `${view.replace('/', '-')}-${width}-${colorScheme}`, width, 740);
      }
    }
    await page.emulateMedia({ colorScheme: null });

    const noonMs = noonOf(ZONE, NIGHT) + 24 * 60 * MINUTE_MS;
    await house.live((noonMs - house.clock.nowMs()) / MINUTE_MS + 4);
    const sheet = storedSheet(house.running.parts.store, NIGHT);
    expect(sheet?.whole).toBe(true);
    if (sheet !== null) writeFileSync(join(FOLDER, 'night.txt'), `${renderText(sheet)}\n`);
    await shot(`nights/${NIGHT}`, 'iframe', 'night', TABLET.width, TABLET.height);
    await viewer.close();
    await house.stop();
    house.remove();
    built.remove();
  },
  300_000,
);
