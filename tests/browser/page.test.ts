import { describe, expect, it } from 'vitest';
import { HOUR_MS, MINUTE_MS } from '../../src/time.ts';
import type { FakeState } from '../web/fake-source.ts';
import { NOW_MS, recordAt } from '../web/juniper-evening.ts';
import { hasChromium } from './chromium.ts';
import { PASSPHRASE, useWindow } from './window.ts';

describe.skipIf(!hasChromium)('the page in Chromium', () => {
  const at = useWindow();
  const show = async (state: FakeState, view = 'tonight'): Promise<void> => {
    at.source.show(state);
    await at.open(view);
  };

  describe('tonight', () => {
    it('draws what a record brings without being loaded again', async () => {
      await at.open('tonight');
      at.source.emit({
        kind: 'record',
        record: { ...recordAt(NOW_MS + MINUTE_MS), iceOnHandKwh: 4.2, reason: 'A new reason.' },
      });
      await at.page.getByText('A new reason.').waitFor();
      expect(await at.text('.figures')).toContain('4.2 kWh');
    });

    it('reads the strip by keys and by touch, and tells the values as text', async () => {
      await at.open('tonight');
      const slider = at.page.getByRole('slider');
      await slider.focus();
      await at.page.keyboard.press('Home');
      await at.page.keyboard.press('PageUp');
      await at.page.keyboard.press('ArrowRight');
      expect(await at.text('.reading')).toContain('13:15');
      const spoken = await slider.getAttribute('aria-valuetext');
      expect(spoken).toContain('13:15, Price 0.28');
      expect(spoken).toMatch(/Ice on hand 6\.\d kWh/);
      await at.page.keyboard.press('End');
      expect(await at.text('.reading')).toContain('planned');
      await at.page.keyboard.press('n');
      expect(await at.text('.reading')).toContain('21:20');
      const box = await slider.boundingBox();
      await at.page.mouse.click((box?.x ?? 0) + (box?.width ?? 0) / 2, (box?.y ?? 0) + 200);
      expect(await at.text('.reading')).toMatch(/00:0[01]|23:59/);
    });

    it('turns into a table of the same values with one key, and back', async () => {
      await at.open('tonight');
      await at.page.getByRole('slider').focus();
      await at.page.keyboard.press('t');
      const rows = at.page.locator('.long tbody tr');
      expect(await rows.count()).toBe(96);
      const quarter = await rows
        .filter({ hasText: '21:15' })
        .locator('data')
        .evaluateAll((all) => all.map((one) => Number(one.getAttribute('value'))));
      const near = recordAt(NOW_MS - MINUTE_MS - 5 * MINUTE_MS);
      expect(quarter[0]).toBe(near.priceMoneyPerKwh);
      expect(Math.abs(quarter[3] - near.iceOnHandKwh)).toBeLessThan(0.2);
      await at.page.keyboard.press('t');
      expect(await at.page.getByRole('slider').evaluate((slider) => slider === document.activeElement)).toBe(
        true,
      );
    });

    it('lays over what it thought at noon', async () => {
      await at.open('tonight');
      await at.page.getByRole('button', { name: 'Lay over what it thought at noon' }).click();
      await at.page.locator('.line.thought').first().waitFor();
      expect(await at.text('.reading')).toContain('Ice, thought at noon');
      expect(await at.page.locator('.strip').textContent()).toContain('thought at 12:00');
    });

    it('turns to the night before and back, and writes units as the viewer likes', async () => {
      await at.open('tonight');
      await at.page.getByRole('button', { name: 'Night before' }).click();
      await at.page.getByText('The night of Mon 13 July').waitFor();
      await at.page.getByRole('button', { name: 'Tonight' }).click();
      await at.page.getByText('The night of Tue 14 July').waitFor();
      await at.page.getByLabel('Units').selectOption('IP');
      const fahrenheit = ((recordAt(NOW_MS).outdoorC ?? 0) * 1.8 + 32).toFixed(1);
      expect(await at.text('.figures')).toContain(`${fahrenheit} °F`);
      await at.page.reload();
      await at.page.locator('main h1').waitFor();
      expect(await at.text('.figures')).toContain('°F');
    });

    it('holds still when asked to', async () => {
      await at.open('tonight');
      await at.page.getByRole('button', { name: 'Hold the page still' }).click();
      at.source.emit({
        kind: 'record',
        record: { ...recordAt(NOW_MS + MINUTE_MS), reason: 'A new reason.' },
      });
      await at.page.waitForTimeout(700);
      expect(await at.text('main')).not.toContain('A new reason.');
      expect(await at.text('footer')).toContain('Held still at 21:20');
      await at.page.getByRole('button', { name: 'Hold the page still' }).click();
      await at.page.getByText('A new reason.').waitFor();
    });
  });

  describe('wishes', () => {
    it('closes with Escape and returns to the button', async () => {
      await at.open('tonight');
      await at.page.getByRole('button', { name: 'Save ice' }).press('Enter');
      await at.page.keyboard.press('Escape');
      expect(await at.page.evaluate(() => document.activeElement?.textContent)).toBe('Save ice');
    });

    it('offers none where no passphrase is set, and says how to set one', async () => {
      await at.stop();
      await at.serve(null);
      await at.open('tonight');
      expect(await at.page.getByRole('button', { name: 'Cool now' }).isVisible()).toBe(false);
      expect(await at.text('main')).toContain('web.passphrase-file');
    });

    it('sets strategy and limit on the plant sheet', async () => {
      await at.open('plant');
      await at.page.getByLabel('Who decides').selectOption('timetable');
      await at.page.getByLabel('Comfort limit').fill('25.5');
      await at.page.locator('#set-passphrase').fill(PASSPHRASE);
      await at.page.getByRole('button', { name: 'Apply' }).click();
      await at.page.getByText('Applied.').waitFor();
      expect(at.source.changes).toEqual(['strategy timetable', 'limit 25.5']);
    });
  });

  describe('empty and broken states each say what to do', () => {
    it.each<[FakeState, RegExp]>([['held-back', /Held back by high-pressure\. .*clean the condenser/]])(
      '%s',
      async (state, sentence) => {
        await show(state);
        await at.page.locator('.notices li').first().waitFor();
        expect((await at.text('.notices')).replaceAll('\n', ' ')).toMatch(sentence);
      },
    );

    it('says since when no record was written', async () => {
      const view = at.source.now();
      at.source.now = () => ({ ...view, record: recordAt(NOW_MS - HOUR_MS) });
      await at.open('tonight');
      await at.page.getByText('No record since 20:20.').waitFor();
    });
  });

  it('shows the ledger with months summed, and a night with its strip and sheet', async () => {
    await at.open('nights');
    const rows = at.page.locator('tbody tr:not(.total)');
    await rows.first().waitFor();
    expect(await rows.count()).toBe(31);
    const july = at.source.nights('2026-07-01', '2026-07-31').rows;
    const made = july.reduce((sum, row) => sum + (row.madeKwh ?? 0), 0);
    const total = await at.page.locator('.total').first().locator('data').first().getAttribute('value');
    expect(Number(total)).toBeCloseTo(made, 9);
    await at.page.getByRole('link', { name: 'Sun 12 July' }).click();
    await at.page.getByRole('heading', { name: 'Night sheet of Sun 12 July' }).waitFor();
    await at.page.frameLocator('iframe').getByText('Made 4.3 kWh.').waitFor();
    expect(await at.page.locator('.line.ice.pen').count()).toBeGreaterThan(0);
  });
});
