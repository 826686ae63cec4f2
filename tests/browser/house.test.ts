/**
 * The page on a real evening: Chromium, the daemon, its database, a broker and a simulated hut. The night of 13 July is
 * lived from noon to noon, then the evening of the 14th until twenty to nine; from there the tests let it live on.
 */
import { execFileSync } from 'node:child_process';
import { existsSync } from 'node:fs';
import { AxeBuilder } from '@axe-core/playwright';
import { connectAsync, type MqttClient } from 'mqtt';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import type { NightSheet } from '../../src/reports/night-schema.ts';
import { renderText } from '../../src/reports/render-text.ts';
import { HOUR_MS, MINUTE_MS, noonOf } from '../../src/time.ts';
import { lookAtStore } from '../../src/verbs/check-store.ts';
import type { NightsView, NowAnswer } from '../../src/web/source.ts';
import { hasChromium } from './chromium.ts';
import { PASSPHRASE, startHouse, type House } from './house.ts';
import { buildPage, type BuiltPage } from './page-build.ts';
import { openViewer, type Viewer } from './viewer.ts';

const ZONE = 'Europe/Madrid';
const hasPrlimit = existsSync('/usr/bin/prlimit');
if (!hasPrlimit) console.warn('SKIPPED: prlimit is not installed; the page is not shown with a full disk.');
const NIGHT = '2026-07-13';
const START_MS = noonOf(ZONE, NIGHT) + 2 * MINUTE_MS;
/** Until twenty to nine the next evening. */
const LIVED_MIN = 32 * 60 + 38;
const VIEWS: Readonly<Record<string, string>> = {
  tonight: '.line.ice.pen',
  nights: '.ledger tbody tr',
  [`nights/${NIGHT}`]: 'iframe',
  rehearsal: 'main table',
  plant: 'main tbody tr',
};

describe.skipIf(!hasChromium)('the page on a real evening', () => {
  let built: BuiltPage;
  let house: House;
  let viewer: Viewer;
  let hub: MqttClient;
  /** What the broker keeps of the site, by topic below it. */
  const told = new Map<string, string>();

  const get = async <T>(path: string): Promise<T> =>
    (await (await fetch(new URL(path, house.pageUrl))).json()) as T;
  const now = (): Promise<NowAnswer> => get<NowAnswer>('/api/now');
  const open = (view: string, width?: number): Promise<void> => viewer.open(house.pageUrl, view, width);
  const notice = async (pattern: RegExp): Promise<void> => {
    await viewer.page.locator('.notices li').first().waitFor();
    expect(await viewer.text('.notices')).toMatch(pattern);
  };

  beforeAll(async () => {
    built = buildPage();
    house = await startHouse({ startMs: START_MS, pageDir: built.pageDir });
    hub = await connectAsync(house.brokerUrl, { clientId: 'hub' });
    const root = `homie/5/${house.config.site.id}/`;
    hub.on('message', (topic, payload) => told.set(topic.slice(root.length), payload.toString()));
    await hub.subscribeAsync(`${root}#`);
    await house.live(4);
    house.clock.advance(1000);
    // the bank begins without ice, and its owner has looked
    await hub.publishAsync(`${root}bank/told/set`, 'empty', { qos: 2 });
    await house.live(LIVED_MIN - 4);
    viewer = await openViewer();
  }, 180_000);
  afterAll(async () => {
    await viewer?.close();
    await hub?.endAsync();
    await house?.stop();
    house?.remove();
    built?.remove();
  });
  afterEach(() => {
    const { complaints } = viewer;
    viewer.complaints = [];
    expect(complaints).toEqual([]);
  });

  it('opens with one sentence, in under 100 kB with its data, and asks nobody else', async () => {
    await open('tonight');
    expect(await viewer.text('h1')).toMatch(/^(Ice|Not sure|No ice|Hardly)/);
    const { record } = await now();
    expect(await viewer.text('main')).toContain(record?.reason);
    await viewer.page.locator('.line.ice.pen').first().waitFor();
    const bytes = await viewer.page.evaluate(() =>
      [...performance.getEntriesByType('navigation'), ...performance.getEntriesByType('resource')].reduce(
        (sum, entry) => sum + (entry instanceof PerformanceResourceTiming ? entry.encodedBodySize : 0),
        0,
      ),
    );
    console.info(`first paint with its data: ${(bytes / 1000).toFixed(1)} kB`);
    expect(bytes).toBeGreaterThan(10_000);
    expect(bytes).toBeLessThan(100_000);
    const foreign = viewer.asked.filter((url) => url !== 'about:blank' && !url.startsWith(house.pageUrl));
    expect(foreign).toEqual([]);
  });

  it('goes on by itself with each record, and shows the very figures of page, programming interface, MQTT and metrics', async () => {
    const clock = (await viewer.text('.title-block')).match(/Issued (\d\d:\d\d)/)?.[1] ?? '';
    await house.live(6);
    await viewer.page.locator('.title-block', { hasNotText: `Issued${clock}` }).waitFor();
    const { record } = await now();
    await expect
      .poll(() => viewer.figures('.figures'))
      .toEqual([
        record?.iceOnHandKwh,
        record?.inventoryPct,
        record?.leavingWaterC,
        record?.roomC,
        record?.outdoorC,
        record?.priceMoneyPerKwh,
        record?.worthOfIceMoneyPerKwh,
      ]);
    // A change of less than a unit of the last decimal is no news on MQTT.
    expect(Math.abs(Number(told.get('bank/ice-on-hand')) - (record?.iceOnHandKwh ?? 0))).toBeLessThan(0.0151);
    expect(told.get('dispatch/reason')).toBe(record?.reason);
    const metrics = await (await fetch(new URL('/metrics', house.pageUrl))).text();
    const joules = /^rimehold_ice_on_hand_joules\{bound="estimate"\} (\d+)$/m.exec(metrics)?.[1];
    expect(Number(joules) / 3.6e6).toBeCloseTo(record?.iceOnHandKwh ?? 0, 6);
    const [stored] = await get<{ atMs: number; iceOnHandKwh: number }[]>(
      `/api/records?from=${instant((record?.atMs ?? 0) - 1000)}&to=${instant(record?.atMs ?? 0)}`,
    );
    expect(stored.iceOnHandKwh).toBe(record?.iceOnHandKwh);
  });

  it('tells one night with the same figures in ledger, sheet, text, CSV, MQTT and programming interface', async () => {
    const sheet = await get<NightSheet>(`/api/nights/${NIGHT}`);
    expect(sheet.whole).toBe(true);
    const figures = [
      sheet.ice.startKwh,
      sheet.ice.endKwh,
      sheet.made.kwh,
      sheet.melted.kwh,
      sheet.leaked.kwh,
      sheet.electricity.totalKwh,
      sheet.cop.machine,
      sheet.electricity.money,
      sheet.comparisons.find(({ strategy }) => strategy === 'no-storage')?.savedMoney,
      sheet.comfort.warmKh,
      sheet.balance.residualPct,
      // What is not known, such as a saving where the ice at the start was guessed, has a dash and no figure.
    ].filter((value) => value !== null && value !== undefined);
    await open('nights');
    await viewer.page.locator('.ledger tbody tr').first().waitFor();
    expect(await viewer.figures('tbody tr:not(.total)')).toEqual(figures);

    expect(JSON.parse(told.get('night/sheet') ?? '{}')).toEqual(sheet);
    expect(Number(told.get('night/cost'))).toBeCloseTo(sheet.electricity.money, 2);
    const { rows } = await get<NightsView>('/api/nights');
    expect(rows.map(({ madeKwh, costMoney }) => [madeKwh, costMoney])).toEqual([
      [sheet.made.kwh, sheet.electricity.money],
    ]);
    const csv = await (await fetch(new URL('/api/nights.csv', house.pageUrl))).text();
    const [head, row] = csv.split('\r\n').map((line) => line.split(','));
    const cell = (name: string): number => Number(row[head.indexOf(name)]);
    expect([cell('made_kwh'), cell('melted_kwh'), cell('ice_end_kwh')]).toEqual([
      sheet.made.kwh,
      sheet.melted.kwh,
      sheet.ice.endKwh,
    ]);

    const paper = renderText(sheet);
    await viewer.page.getByRole('link', { name: 'Mon 13 July' }).click();
    const frame = viewer.page.frameLocator('iframe').locator('body');
    await frame.waitFor();
    const printed = await frame.innerText();
    for (const kwh of [sheet.made.kwh, sheet.melted.kwh, sheet.leaked.kwh, sheet.electricity.totalKwh]) {
      expect(paper).toContain(kwh.toFixed(2));
      expect(printed).toContain(kwh.toFixed(2));
    }
    expect(sheet.told).toMatchObject([{ what: 'empty', takenBack: null }]);
    expect(printed).toContain('empty');
    viewer.complaints = viewer.complaints.filter((line) => !line.startsWith('Blocked script execution'));
  });

  it.each(['A4', 'Letter'])('prints that night on one page of %s', async (format) => {
    await viewer.page.goto(new URL(`/nights/${NIGHT}`, house.pageUrl).href);
    const pdf = (await viewer.page.pdf({ format, printBackground: true })).toString('latin1');
    expect(pdf.match(/\/Type\s*\/Page\b/g)).toHaveLength(1);
  });

  it('takes a wish by keyboard alone: cost, passphrase, countdown, and says what holds it back', async () => {
    const { page } = viewer;
    await open('tonight');
    await page.getByRole('button', { name: 'Make ice' }).focus();
    await page.keyboard.press('Enter');
    await page.getByText(/of ice more would be made\. It (costs|saves) about/).waitFor();
    await page.locator('#wish-passphrase').focus();
    await page.keyboard.type('a guess');
    await page.keyboard.press('Enter');
    await page.getByText('Not done: That is not the passphrase.').waitFor();
    viewer.complaints = viewer.complaints.filter((line) => !line.includes('401'));
    await page.locator('#wish-passphrase').fill(PASSPHRASE);
    await page.keyboard.press('Enter');
    await page.getByRole('timer').waitFor();
    expect(await page.getByRole('timer').innerText()).toMatch(/^(1:00:00|59:5\d)$/);
    await house.live(4);
    await expect.poll(() => told.get('dispatch/wish')).toBe('make-ice');
    expect((await now()).record).toMatchObject({ wish: 'make-ice', command: 'charge-now' });
    await page.getByRole('button', { name: 'Give back now' }).press('Enter');
    await page.getByRole('button', { name: 'Stand down' }).press('Enter');
    await page.getByRole('button', { name: 'Confirm: stand down' }).press('Enter');
    await page.getByRole('timer').waitFor();
    await page
      .getByText(/You wished everything off until \d\d:\d\d\. The ice machine has just started and runs on/)
      .first()
      .waitFor();
    await notice(/Held back by minimum on time\./);
    await page.getByRole('button', { name: 'Give back now' }).press('Enter');
    await page.getByRole('button', { name: 'Make ice' }).waitFor();
    expect((await now()).wish.name).toBe('none');
  });

  it('takes what the owner saw at the bank, tells it on MQTT, and takes it back without a trace', async () => {
    const { page } = viewer;
    await open('plant');
    expect(await viewer.text('main')).toContain('Heat leak of the bank');
    // what `rimehold check` reads from the database was kept at most half an hour ago
    const kept = lookAtStore(house.config).estimate;
    const { learned, points } = await now();
    expect(kept?.learned.map(({ name }) => name)).toEqual(learned.map(({ name }) => name));
    expect(kept?.learned[0].value).toBeCloseTo(learned[0].value, 0);
    const checked = points
      .filter(({ errorAtIcePointK }) => errorAtIcePointK !== null)
      .map(({ point }) => point);
    const keptChecked = kept?.probes.filter(({ errorAtIcePointK }) => errorAtIcePointK !== null);
    expect(checked).toEqual(expect.arrayContaining(keptChecked?.map(({ point }) => point) ?? []));
    await page.getByRole('button', { name: 'The bank is full' }).press('Enter');
    await page.getByText('The estimate goes to a full bank at once').waitFor();
    const before = (await now()).record?.iceOnHandKwh ?? 0;
    await page.getByRole('button', { name: 'Confirm' }).press('Enter');
    const was = page.locator('main').getByText(/Told at \d\d:\d\d: The bank is full\. Ice on hand went from/);
    await was.waitFor();
    await expect.poll(() => told.get('bank/told')).toBe('full');
    expect((await now()).record?.inventoryPct).toBeGreaterThan(95);
    await page.getByRole('button', { name: 'Take back' }).press('Enter');
    await was.waitFor({ state: 'hidden' });
    expect((await now()).record?.iceOnHandKwh).toBeCloseTo(before, 1);
    await expect.poll(() => told.get('bank/told')).toBe('nothing');
  });

  it('takes settings that come in a burst over MQTT, every one of them', async () => {
    const set = (path: string, value: string) =>
      hub.publishAsync(`homie/5/juniper/${path}/set`, value, { qos: 2 });
    await Promise.all([
      set('comfort/limit', '25'),
      set('plan/strategy', 'timetable'),
      set('dispatch/wish-for', 'PT30M'),
    ]);
    await expect.poll(async () => (await now()).strategy).toBe('timetable');
    await house.live(2);
    expect((await now()).record).toMatchObject({ limitC: 25, strategy: 'timetable' });
    await Promise.all([set('comfort/limit', '26'), set('plan/strategy', 'planned')]);
    await expect.poll(async () => (await now()).strategy).toBe('planned');
    await house.live(2);
    expect((await now()).record).toMatchObject({ limitC: 26, strategy: 'planned' });
  });

  it('follows the units of the viewer, on every sheet and in the strip', async () => {
    const { page } = viewer;
    await open('plant');
    await page.getByLabel('Units').selectOption('IP');
    expect(await viewer.text('main')).not.toMatch(/°C|W\/K|\d kg/);
    await open('tonight');
    expect(await viewer.text('.figures')).toMatch(/kBTU.*°F/);
    expect(await viewer.text('.reading')).toMatch(/°F.*kBTU/);
    await page.getByLabel('Units').selectOption('');
    expect(await viewer.text('.figures')).toMatch(/kWh.*°C/);
  });

  it('fits 320 px, with every word of the strip whole', async () => {
    for (const [view, settled] of Object.entries(VIEWS)) {
      await open(view, 320);
      await viewer.page.locator(settled).first().waitFor();
      expect(await viewer.page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(320);
    }
    await open('tonight', 320);
    await viewer.page.locator('.line.ice.pen').first().waitFor();
    const cut = await viewer.page.getByRole('slider').evaluate((roll) => {
      const seen = roll.getBoundingClientRect();
      return [...roll.querySelectorAll('text')]
        .filter((text) => {
          const { left, right } = text.getBoundingClientRect();
          return (
            right > seen.left + 1 && left < seen.right - 1 && (left < seen.left - 1 || right > seen.right + 1)
          );
        })
        .map(({ textContent }) => textContent);
    });
    expect(cut).toEqual([]);
  });

  it('has no fault that axe finds on any sheet, in the light and the dark theme', async () => {
    const { page } = viewer;
    const everything = ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa', 'best-practice'];
    for (const [view, settled] of Object.entries(VIEWS)) {
      await open(view);
      await page.locator(settled).first().waitFor();
      if (view === 'tonight') await page.getByRole('button', { name: 'Cool now' }).click();
      if (view === 'plant') await page.getByRole('button', { name: 'A probe was moved' }).click();
      // the dark theme is the same rules with other colours: three sheets have all of them
      const themes = ['tonight', 'nights', 'plant'].includes(view)
        ? (['light', 'dark'] as const)
        : (['light'] as const);
      for (const colorScheme of themes) {
        await page.emulateMedia({ colorScheme });
        const axe = new AxeBuilder({ page }).setLegacyMode(true);
        const run = colorScheme === 'light' ? axe.withTags(everything) : axe.withRules(['color-contrast']);
        const { violations } = await run.analyze();
        expect(violations.map(({ id, nodes }) => `${view} ${id} ${nodes[0].html}`)).toEqual([]);
      }
    }
    await page.emulateMedia({ colorScheme: null });
    // axe tries to look into the sheet's frame, which lets no script in; the browser says so.
    viewer.complaints = viewer.complaints.filter((line) => !line.startsWith('Blocked script execution'));
  }, 120_000);

  describe('broken states say what to do', () => {
    it('a probe that has fallen silent', async () => {
      house.silent.add('leaving-water');
      await house.live(10);
      await open('tonight');
      await notice(/leaving-water was last heard \d+ min ago\. .*battery/);
      for (const point of ['entering-water', 'bank-bottom'] as const) house.silent.add(point);
      await house.live(10);
      await viewer.page.reload();
      await notice(/3 points have fallen silent, the first \d+ min ago: .*Look at what they share/);
      house.silent.clear();
      await house.live(4);
    });

    it('a broker that is away', async () => {
      await house.brokerAway();
      await expect.poll(() => house.running.daemon.view().connected).toBe(false);
      house.clock.advance(4 * MINUTE_MS);
      await open('tonight');
      expect(await viewer.text('.notices')).not.toContain('was last heard');
      await notice(/The broker is away since \d\d:\d\d\. .*Start the broker/);
      await house.brokerBack();
      await expect.poll(() => house.running.daemon.view().connected, { timeout: 10_000 }).toBe(true);
    }, 30_000);

    it.skipIf(!hasPrlimit)('a full disk', async () => {
      const room = (bytes: string): Buffer =>
        execFileSync('prlimit', ['--pid', String(process.pid), `--fsize=${bytes}:unlimited`]);
      // files of this process may not be written, as on a full disk: SQLite meets EFBIG where it would meet ENOSPC
      room('0');
      try {
        house.clock.advance(12 * MINUTE_MS);
      } finally {
        room('unlimited');
      }
      await open('tonight');
      await notice(/The disk is full\. .*Free some space/);
      house.clock.advance(12 * MINUTE_MS);
      expect((await now()).health.store.state).toBe('ok');
    });

    it('too many wrong passphrases', async () => {
      const { page } = viewer;
      await page.context().clearCookies();
      await open('tonight');
      await page.getByRole('button', { name: 'Cool now' }).click();
      for (let attempt = 1; attempt <= 6; attempt += 1) {
        await page.locator('#wish-passphrase').fill(`guess ${attempt}`);
        await page.getByRole('button', { name: 'Confirm: cool now' }).click();
        await page
          .getByText(attempt < 6 ? 'That is not the passphrase' : /Too many wrong passphrases; try again in/)
          .waitFor();
      }
      viewer.complaints = viewer.complaints.filter((line) => !/40?1|429/.test(line));
      const foreign = await fetch(new URL('/api/wish', house.pageUrl), {
        method: 'POST',
        headers: { 'content-type': 'application/json', origin: 'http://elsewhere.example' },
        body: JSON.stringify({ name: 'none' }),
      });
      expect(foreign.status).toBe(403);
    });

    it('a daemon that is gone, greyed with the hour it last knew', async () => {
      await open('tonight');
      const issued = (await viewer.text('.title-block')).match(/Issued (\d\d:\d\d)/)?.[1];
      await house.stop();
      const lost = viewer.page.locator('.notices').getByText(`This page lost rimehold at ${issued}.`);
      await lost.waitFor({ timeout: 15_000 });
      expect(await viewer.page.locator('body').getAttribute('class')).toContain('stale');
      viewer.complaints = [];
    }, 30_000);
  });

  describe('a house of its own', () => {
    let other: House;
    afterEach(async () => {
      await other.stop();
    });

    it('on its first day without a sensor, then with them', async () => {
      other = await startHouse({ startMs: noonOf(ZONE, '2026-07-14') + 5 * HOUR_MS, pageDir: built.pageDir });
      other.clock.advance(2 * MINUTE_MS);
      await viewer.open(other.pageUrl, 'tonight');
      await notice(/No point has been heard yet\. .*rimehold check.* First day\. .*first noon/);
      await viewer.open(other.pageUrl, 'nights');
      expect(await viewer.text('main')).toContain(
        'No night is closed yet. The first sheet is written at noon',
      );
      await viewer.open(other.pageUrl, 'rehearsal');
      expect(await viewer.text('main')).toContain('none is recorded yet');
      await other.live(20);
      await viewer.open(other.pageUrl, 'tonight');
      await notice(/First day\./);
      expect(await viewer.text('h1')).not.toBe('Ice for the whole night.');
      other.remove();
      viewer.complaints = [];
    }, 30_000);

    it('with a clock that is behind its own records', async () => {
      other = await startHouse({ startMs: START_MS, pageDir: built.pageDir, folder: house.folder });
      other.clock.advance(2 * MINUTE_MS);
      await viewer.open(other.pageUrl, 'tonight');
      await notice(/The clock is doubtful\. .*time server/);
      viewer.complaints = [];
    }, 30_000);
  });
});

const instant = (atMs: number): string => `${new Date(atMs).toISOString().slice(0, 19)}Z`;
