import { describe, expect, it } from 'vitest';
import { ledgerOf } from '../../src/reports/ledger.ts';
import type { NightSheet } from '../../src/reports/night.ts';
import { readSheet } from '../../src/reports/night-schema.ts';
import { renderLedgerCsv, renderLedgerText } from '../../src/reports/render-ledger.ts';
import { driftingSheets } from './drift-story.ts';
import { juniper, toldSheet } from './juniper.ts';

const base = toldSheet({ stepMs: 600_000, lostW: { charging: 200 } });

function night(date: string, changes: Partial<NightSheet> = {}): NightSheet {
  return { ...base, night: { ...base.night, date }, ...changes };
}

const saltmarsh = { ...base.site, id: 'saltmarsh', name: 'Saltmarsh shed' };
const several = [
  night('2026-08-01', { whole: false, partialBecause: 'nothing was recorded after 03:10', coveredPct: 61 }),
  night('2026-07-30'),
  night('2026-07-31'),
  night('2026-07-31', { site: saltmarsh }),
];

describe('the ledger', () => {
  it('has the nights of each site in order, and sums that are the sums', () => {
    const ledger = ledgerOf(several);
    expect(ledger.sites.map((site) => [site.site.id, site.rows.map((row) => row.night)])).toEqual([
      ['juniper', ['2026-07-30', '2026-07-31', '2026-08-01']],
      ['saltmarsh', ['2026-07-31']],
    ]);
    const [july, august] = ledger.sites[0].months;
    expect([july.month, july.nights, july.wholeNights]).toEqual(['2026-07', 2, 2]);
    expect([august.month, august.nights, august.wholeNights]).toEqual(['2026-08', 1, 0]);
    expect(july.money).toBeCloseTo(2 * base.electricity.money, 3);
    expect(july.madeKwh).toBeCloseTo(2 * base.made.kwh, 3);
    expect(july.cop).toBeCloseTo(base.cop.machine ?? 0, 2);
    expect(july.residualPct).toBeCloseTo(base.balance.residualPct ?? 0, 1);
    const [together] = ledger.together;
    expect([together.month, together.sites, together.nights]).toEqual(['2026-07', 2, 3]);
    expect(together.money).toBeCloseTo(3 * base.electricity.money, 3);
  });

  it('shows a range, and never adds up two currencies', () => {
    const ledger = ledgerOf(
      [...several, night('2026-07-31', { site: { ...saltmarsh, id: 'c', currency: 'CHF' } })],
      {
        from: '2026-07-31',
        to: '2026-07-31',
      },
    );
    expect(ledger.sites.map((site) => site.rows.length)).toEqual([1, 1, 1]);
    expect(ledger.together.map((one) => [one.currency, one.sites])).toEqual([
      ['EUR', 2],
      ['CHF', 1],
    ]);
  });

  it('carries its notes in the margin, and looks as it was looked at', () => {
    const text = renderLedgerText(ledgerOf(several));
    expect(text).toMatchSnapshot();
    expect(text.split('\n').filter((line) => Array.from(line).length > 80)).toEqual([]);
    expect(text).toContain('partial: nothing was recorded after 03:10');
    expect(text).toContain('balance open: the ice machine');
  });

  it('writes what drifts, beside the night it set in', () => {
    const noise = { leak: { sd: 0.03, rho: 0 } };
    const sheets = driftingSheets({
      nights: 70,
      seed: 2,
      noise,
      change: { atNight: 50, by: { leak: Math.log(1.5) } },
    });
    const ledger = ledgerOf(sheets);
    const [finding] = ledger.sites[0].drift;
    expect(finding.signature).toBe('wet-insulation');
    const row = ledger.sites[0].rows.find((one) => one.night === finding.since);
    expect(row?.notes.join()).toContain(finding.note);
    const text = renderLedgerText(ledger);
    expect(text.replaceAll('\n', ' ')).toContain('Look at lid, seals and insulation');
    expect(text.split('\n').filter((line) => Array.from(line).length > 80)).toEqual([]);
  });

  it('fits 80 columns in inch-pound units and yen, and says what an empty one waits for', () => {
    const sheets = [toldSheet({ stepMs: 600_000 }, { site: juniper('IP', 'JPY') })];
    const lines = renderLedgerText(ledgerOf(sheets)).split('\n');
    expect(lines.filter((line) => Array.from(line).length > 80)).toEqual([]);
    expect(renderLedgerText(ledgerOf([]))).toMatch(/first sheet comes at the noon/);
  });

  it('as CSV has one row a night of every site', () => {
    const rows = renderLedgerCsv(several).trimEnd().split('\r\n');
    expect(rows).toHaveLength(5);
    expect(rows.slice(1).map((row) => row.split(',').slice(0, 2).join(' '))).toEqual([
      'juniper 2026-07-30',
      'juniper 2026-07-31',
      'juniper 2026-08-01',
      'saltmarsh 2026-07-31',
    ]);
  });

  it('opens a year in a blink', () => {
    const sheets = driftingSheets({
      nights: 365,
      seed: 9,
      noise: { leak: { sd: 0.05, rho: 0.3 }, coil: { sd: 0.05, rho: 0.3 } },
    });
    const bodies = sheets.map((sheet) => JSON.stringify(sheet));
    const start = process.cpuUsage();
    ledgerOf(bodies.flatMap((body) => readSheet(body) ?? []));
    const { user, system } = process.cpuUsage(start);
    console.log(`a year's ledger: ${((user + system) / 1000).toFixed(0)} ms of processor`);
    expect(bodies).toHaveLength(365);
  });
});
