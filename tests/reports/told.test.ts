/** What the owner said of the bank, on the sheet of its night. */
import { describe, expect, it } from 'vitest';
import { nightSheetSchema } from '../../src/reports/night-schema.ts';
import { toldKwh, type Told } from '../../src/reports/orders.ts';
import { renderHtml } from '../../src/reports/render-html.ts';
import { renderText } from '../../src/reports/render-text.ts';
import { HOUR_MS } from '../../src/time.ts';
import { JULY, toldSheet } from './juniper.ts';

const STEP = { stepMs: 600_000 };
const atMs = JULY.startMs + 6 * HOUR_MS;
const full: Told = { atMs, what: 'full', point: null, takenBackMs: null, beforeKwh: 3, afterKwh: 16 };
const moved: Told = { ...full, what: 'probe-moved', point: 'bank-top', afterKwh: 3 };

describe('what the owner said', () => {
  it('stands on the sheet in every form, with when it was taken back', () => {
    const back = { ...full, takenBackMs: atMs + HOUR_MS / 4 };
    const sheet = toldSheet(STEP, { told: [back, moved] });
    expect(nightSheetSchema.safeParse(sheet).success).toBe(true);
    expect(sheet.told).toEqual([
      { at: '2026-07-14T16:00:00Z', what: 'full', point: null, takenBack: '2026-07-14T16:15:00Z' },
      { at: '2026-07-14T16:00:00Z', what: 'probe-moved', point: 'bank-top', takenBack: null },
    ]);
    for (const form of [renderText(sheet), renderHtml(sheet)]) {
      expect(form).toContain('18:00 full, taken back 18:15');
      expect(form).toContain('18:00 probe-moved (bank-top)');
    }
  });

  it('leaves sheets of other nights as they always were', () => {
    expect(toldSheet(STEP)).not.toHaveProperty('told');
  });

  it('counts as cold that came by word alone, unless it was taken back', () => {
    expect(toldKwh([full, moved])).toBe(13);
    expect(toldKwh([{ ...full, takenBackMs: atMs + 1 }])).toBe(0);
  });

  it('is named where it explains an open balance, and not where it does not', () => {
    // 300 W lost while charging are some 2 kWh of cold that nothing accounts for
    const lost = { ...STEP, lostW: { charging: 300 } };
    const { residualKwh } = toldSheet(lost).balance;
    const empty: Told = { ...full, what: 'empty', beforeKwh: residualKwh, afterKwh: 0 };
    expect(toldSheet(lost, { told: [empty] }).balance.culprit).toContain('what the owner told');
    expect(toldSheet(lost, { told: [moved] }).balance.culprit).not.toContain('what the owner told');
  });
});
