import { describe, expect, it } from 'vitest';
import { hasChromium } from './chromium.ts';
import { VIEWS, useWindow } from './window.ts';

describe.skipIf(!hasChromium)('the page for everybody: eyes, ears, keyboards, small windows', () => {
  const at = useWindow();
  it('shows six hours at a time on a phone, the present ones first, and rolls on', async () => {
    await at.open('tonight', 360, 740);
    const roll = at.page.getByRole('slider');
    await at.page.locator('.line.ice.pen').first().waitFor();
    const [width, paper, left] = await roll.evaluate((element) => [
      element.clientWidth,
      element.scrollWidth,
      element.scrollLeft,
    ]);
    expect(paper).toBe(4 * width);
    expect(Math.round(left / width)).toBe(1); // 18:00 to midnight.
    await roll.focus();
    await at.page.keyboard.press('End');
    await at.page.waitForFunction(() => (document.querySelector('[role=slider]')?.scrollLeft ?? 0) >= 0);
    expect(await at.text('.reading')).toContain('12:00');
  });

  it('leads the keyboard from the skip link to the sheet, through all sheets, and never traps it', async () => {
    await at.open('plant');
    await at.page.keyboard.press('Tab');
    expect(await at.page.evaluate(() => document.activeElement?.className)).toBe('skip');
    await at.page.keyboard.press('Enter');
    expect(await at.page.evaluate(() => document.activeElement?.tagName)).toBe('MAIN');
    expect(at.page.url()).toContain('#/plant');
    await at.page.getByRole('link', { name: 'Rehearsal' }).press('Enter');
    expect(await at.text('h1')).toBe('Rehearsal');
    expect(await at.page.title()).toBe('Rehearsal · Juniper hut');
    await at.turnTo('tonight');
    const seen: string[] = [];
    for (let i = 0; i < 30 && seen.at(-1) !== 'BODY'; i += 1) {
      await at.page.keyboard.press('Tab');
      seen.push(await at.page.evaluate(() => document.activeElement?.tagName ?? ''));
    }
    expect(seen).toContain('BODY');
  });

  it('gives every button and link at least 24 by 24 px (WCAG 2.5.8)', async () => {
    await at.open('tonight');
    for (const view of VIEWS) {
      await at.turnTo(view);
      const small = await at.page
        .locator('main a, main button, nav a, footer button, select')
        .evaluateAll((all) =>
          all
            .map((one) => ({ name: one.textContent, box: one.getBoundingClientRect() }))
            .filter(({ box }) => box.width > 0 && (box.height < 24 || box.width < 24))
            .map(({ name }) => name),
        );
      expect(small).toEqual([]);
    }
  });

  it('lets people widen the spacing of text without losing any (WCAG 1.4.12)', async () => {
    await at.open('tonight', 320, 640);
    await at.page.evaluate(() => {
      const sheet = new CSSStyleSheet();
      sheet.replaceSync(
        '* { line-height: 1.5 !important; letter-spacing: 0.12em !important; word-spacing: 0.16em !important }',
      );
      document.adoptedStyleSheets.push(sheet);
    });
    expect(await at.page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(320);
  });
});
