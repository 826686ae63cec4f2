/**
 * Bills as a person asks for them: the built command line, a site file, a store of records. The price list is that of
 * the City of River Falls, Wisconsin, as quoted in bill.test.ts [RF]; the others are worked by hand beside the test.
 */
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import type { CycleRecord } from '../../src/record.ts';
import { openStore } from '../../src/store/store.ts';
import { HOUR_MS, toWall } from '../../src/time.ts';
import { baseRecord } from '../reports/night-story.ts';
import { expectNarrow, expectRefusal, ownFolder, rimehold } from '../strangers/stranger.ts';
import { writeBillSite } from './bill-site.ts';

const utc = (text: string): number => Date.parse(text);

/** One record an hour, each at a power of its own. */
function store(folder: string, from: string, to: string, record: (startMs: number) => Partial<CycleRecord>) {
  const kept = openStore(join(folder, 'store.db'), { siteId: 'juniper' });
  for (let at = utc(from); at < utc(to); at += HOUR_MS)
    kept.addRecord({ ...baseRecord(at + HOUR_MS, HOUR_MS), pricePeriod: '', ...record(at) });
  expect(kept.flush().fault).toBeNull();
  kept.close();
}

const RIVER_FALLS = `
    default: 0.066
    periods: [{name: on-peak, price: 0.191, from: '07:00', to: '19:00', days: [MO, TU, WE, TH, FR], on-holidays: never}]
    holidays: ['2020-09-07']
    fixed-per-month: 14`;

describe('rimehold bill', () => {
  it('prints the published cost of a month, 96.58 dollars [RF], as text, CSV and JSON', async () => {
    const folder = ownFolder();
    writeBillSite(folder, { zone: 'America/Chicago', currency: 'USD', tariff: RIVER_FALLS });
    const onPeak = (at: number): boolean => {
      const { weekday, hour, day } = toWall('America/Chicago', at);
      return weekday >= 1 && weekday <= 5 && hour >= 7 && hour < 19 && day !== 7;
    };
    // 252 of September 2020's 720 hours are on-peak: 21 working days of 12 hours, Labor Day left out.
    store(folder, '2020-09-01T05:00Z', '2020-10-01T05:00Z', (at) => ({
      gridPowerW: onPeak(at) ? (675_540 * 0.45) / 252 : (675_540 * 0.55) / 468,
    }));
    const asked = ['bill', '--month', '2020-09'];
    const [text, csv, json] = await Promise.all([
      rimehold(folder, ...asked),
      rimehold(folder, ...asked, '--csv'),
      rimehold(folder, ...asked, '--json'),
    ]);
    expect(text).toMatchObject({ status: 0, err: '' });
    expectNarrow(text.out);
    expect(text.out).toMatch(/America\/Chicago, zone rules\s20\d\d[a-z]/);
    expect(text.out).toMatch(/^on-peak +303\.9\d+ kWh +0\.1910 USD\/kWh +58\.06$/m);
    expect(text.out).toMatch(/^total .* 96\.58$/m);
    expect(csv.out.split('\r\n').slice(0, 2)).toEqual([
      'site,month,what,quantity,unit,price,currency,amount',
      'juniper,2020-09,fixed charge,1,month,14,USD,14',
    ]);
    expect(csv.out).toMatch(/\r\njuniper,2020-09,total,,,,USD,96\.58\r\n$/);
    expect(JSON.parse(json.out)).toMatchObject({
      totalMoney: 96.58,
      heardPct: 100,
      notes: [],
      start: '2020-09-01T05:00:00Z',
      end: '2020-10-01T05:00:00Z',
    });
  });

  it('bills by the clock of the meter, through a change of the clock on the wall', async () => {
    const folder = ownFolder();
    writeBillSite(folder, {
      zone: 'Europe/London',
      currency: 'GBP',
      tariff: `
    zone: Etc/GMT
    default: 0.25
    periods: [{name: night, price: 0.1, from: '00:30', to: '07:30'}]`,
    });
    // The meter knows no summer time: October 2026 is 744 of its hours, 31 × 7 of them at night, though the cabin's
    // own October, with its 25-hour day, has 745 and begins an hour earlier.
    store(folder, '2026-09-30T20:00Z', '2026-11-01T03:00Z', () => ({ gridPowerW: 1000 }));
    const { out } = await rimehold(folder, 'bill', '--month', '2026-10', '--json');
    const made = JSON.parse(out) as { lines: { what: string; quantity: number; amountMoney: number }[] };
    // 217 × 0.10 = 21.70; 527 × 0.25 = 131.75
    expect(made.lines.map((line) => [line.what, Math.round(line.quantity), line.amountMoney])).toEqual([
      ['default', 527, 131.75],
      ['night', 217, 21.7],
    ]);
    expect(made).toMatchObject({ zone: 'Etc/GMT', start: '2026-10-01T00:00:00Z', totalMoney: 153.45 });
  });

  it('has every kind of line, in a month of 743 hours, with dated prices as they held', async () => {
    const folder = ownFolder();
    writeBillSite(folder, {
      zone: 'Europe/Madrid',
      currency: 'EUR',
      tariff: `
    default: 0.2
    feed-in: 0.05
    fixed-per-day: 0.11
    blocks: [{above: 400 kWh, adds: 0.04}]
    demand: {price: 3, from: '18:00', to: '22:00'}`,
    });
    const evening = utc('2026-03-30T17:00Z');
    store(folder, '2026-02-28T23:00Z', '2026-03-31T22:00Z', (at) => {
      if (at === evening) return { gridPowerW: 2500 };
      if (at === evening - 5 * HOUR_MS) return { gridPowerW: -4000 };
      if (at === utc('2026-03-02T10:00Z'))
        return { gridPowerW: 1000, pricePeriod: 'dated', priceMoneyPerKwh: 0.5 };
      return { gridPowerW: 1000 };
    });
    const { out } = await rimehold(folder, 'bill', '--month', '2026-03', '--json');
    const made = JSON.parse(out) as { lines: { what: string; amountMoney: number }[]; totalMoney: number };
    expect(made.lines.map((line) => [line.what, line.amountMoney])).toEqual([
      ['daily charge', 3.41], // 31 × 0.11; the change day counts as one
      ['default', 148.5], // 743 h: 740 of 1 kWh at the default, one of 2.5, one dated, one fed in: 742.5 × 0.2
      ['dated prices', 0.5],
      ['above 400 kWh', 13.74], // 743.5 − 400 = 343.5 × 0.04
      ['demand', 7.5], // 2.5 kW at 19:00
      ['feed-in', -0.2],
    ]);
    expect(made.totalMoney).toBe(173.45);
  });

  it('refuses in a sentence what cannot be billed', async () => {
    const folder = ownFolder();
    writeBillSite(folder, { zone: 'Europe/Madrid', currency: 'EUR', tariff: '\n    default: 0.2' });
    store(folder, '2026-03-01T00:00Z', '2026-03-01T02:00Z', () => ({ gridPowerW: 1000 }));
    const [none, wrong, part] = await Promise.all([
      rimehold(folder, 'bill', '--month', '2025-03'),
      rimehold(folder, 'bill', '--month', 'March'),
      rimehold(folder, 'bill', '--month', '2026-03'),
    ]);
    expectRefusal(none, 1, '2025-03', '2026-03');
    expectRefusal(wrong, 2, 'YYYY-MM', 'March');
    expect(part.out).toContain('Only 0.3 % of the month was heard');
  });
});
