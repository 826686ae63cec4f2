/** What a night that begins with a guess, or is recorded in part, does not claim. */
import { describe, expect, it } from 'vitest';
import { ledgerOf } from '../../src/reports/ledger.ts';
import { renderHtml } from '../../src/reports/render-html.ts';
import { renderLedgerText } from '../../src/reports/render-ledger.ts';
import { renderText } from '../../src/reports/render-text.ts';
import { balanceAsKnown, whyNotKnown } from '../../src/reports/not-known.ts';
import { toldSheet } from './juniper.ts';

const whole = toldSheet({ stepMs: 600_000, lostW: { charging: 200 } });
/** The interval that a bank begins with of which nobody knows anything. */
const ice = { ...whole.ice, startLowKwh: 0, startHighKwh: 17.9 };
const guessed = { ...whole, ice, balance: balanceAsKnown(whole.balance, { whole: true, ice }) };
const GUESSED = 'how much ice there was at the start was only guessed';

describe('a night whose ice at the start was a guess', () => {
  it('has no residual percentage, no culprit and no saving, in the ledger too', () => {
    expect(whyNotKnown(whole)).toBe('');
    expect(whole.balance.verdict).toBe('open');
    expect(whyNotKnown(guessed)).toBe(GUESSED);
    expect(guessed.balance).toMatchObject({ residualPct: null, verdict: 'unknown', culprit: '' });
    const [site] = ledgerOf([guessed]).sites;
    expect(site.rows[0]).toMatchObject({ savedMoney: null, residualPct: null });
    expect(site.months[0]).toMatchObject({ savedMoney: null, residualPct: null });
    expect(renderLedgerText(ledgerOf([guessed]))).toContain('saved and residual not known');
  });

  it('says why in text and HTML', () => {
    const sheet = { ...guessed, comparisons: [] };
    expect(renderText(sheet).replaceAll(/\s+/g, ' ')).toContain(`not known: ${GUESSED}`);
    expect(renderHtml(sheet)).toContain(GUESSED);
  });

  it('says so of a night that is recorded in part', () => {
    expect(whyNotKnown({ ...whole, whole: false })).toBe('the night is recorded in part');
  });
});

describe('ledger totals', () => {
  it('are the sums of the rows as they are shown, and one night has the COP of its row', () => {
    const dated = (date: string) => ({ ...whole, night: { ...whole.night, date } });
    const [one] = ledgerOf([whole]).sites;
    expect(one.months[0].cop).toBeCloseTo(one.rows[0].cop ?? Number.NaN, 2);
    const [three] = ledgerOf(['2026-07-01', '2026-07-02', '2026-07-03'].map(dated)).sites;
    const cents = three.rows.reduce((sum, row) => sum + Math.round(row.money * 100), 0);
    expect(Math.round(three.months[0].money * 10_000)).toBe(cents * 100);
  });
});
