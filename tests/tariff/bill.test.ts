/**
 * Bills to the cent. Two published price lists, read as quoted:
 * [RF] City of River Falls, Wisconsin, "Time-of-Day Rates", rates as of 29 September 2020
 *      (wi-riverfalls.civicplus.com/606): on-peak 0.1910 and off-peak 0.0660 dollars per kWh, on-peak 7:00-19:00 Monday
 *      to Friday without six holidays; printed monthly costs for 675.54 kWh of which 45, 35, 30 and 25 % are on-peak:
 *      96.58, 88.14, 83.92 and 79.70; at the flat 0.1110 it prints 88.98. The customer charge of 14.00 is not printed on
 *      that page: it is what 88.98 − 675.54 × 0.1110 leaves over, and the four other costs agree with it.
 * [ON] "Summer Time-of-Use Electricity Rates", Bruce Beach Cottagers' Association, Ontario, in force 1 May 2018
 *      (brucebeach.ca/date/summer-time-use-electricity-rates): off-peak 6.5 ct weekdays 19:00-7:00 and all day on
 *      weekends and holidays, mid-peak 9.4 ct 7:00-11:00 and 17:00-19:00, on-peak 13.2 ct 11:00-17:00, 1 May to 31 October.
 */
import { describe, expect, it } from 'vitest';
import type { SiteConfig, TariffConfig } from '../../src/config.ts';
import { HOUR_MS, toWall } from '../../src/time.ts';
import { monthBill, roundMoney } from '../../src/tariff/bill.ts';
import { energyBySlot, type EnergySlot } from '../../src/tariff/energy.ts';
import { blockAdds } from '../../src/tariff/terms.ts';
import { siteWith, utc } from './site.ts';

const WEEKDAYS = ['MO', 'TU', 'WE', 'TH', 'FR'];

function withTerms(config: SiteConfig, terms: Partial<TariffConfig>): SiteConfig {
  const tariff = config.power.tariff;
  if (!tariff) throw new Error('the site has no tariff');
  return { ...config, power: { ...config.power, tariff: { ...tariff, ...terms } } };
}

const hours = (from: string, to: string): number[] => {
  const list: number[] = [];
  for (let at = utc(from); at < utc(to); at += HOUR_MS) list.push(at);
  return list;
};
const slot = (startMs: number, importKwh: number, exportKwh = 0): EnergySlot => ({
  startMs,
  endMs: startMs + HOUR_MS,
  importKwh,
  exportKwh,
  heardMs: HOUR_MS,
});

describe('River Falls time of day [RF]', () => {
  const zone = 'America/Chicago';
  const base = siteWith(
    {
      tariff: {
        default: 0.066,
        periods: [
          {
            name: 'on-peak',
            price: 0.191,
            from: '07:00',
            to: '19:00',
            days: WEEKDAYS,
            'on-holidays': 'never',
          },
        ],
        holidays: ['2020-09-07'],
      },
    },
    { zone, currency: 'USD' },
  );
  const config = withTerms(base, { fixedPerMonth: 14 });
  // September 2020 in Chicago: UTC−5 throughout; Labor Day on the 7th
  const month = hours('2020-09-01T05:00Z', '2020-10-01T05:00Z');
  const onPeak = (at: number): boolean => {
    const wall = toWall(zone, at);
    return wall.weekday >= 1 && wall.weekday <= 5 && wall.hour >= 7 && wall.hour < 19 && wall.day !== 7;
  };
  const use = (share: number): EnergySlot[] => {
    const peakHours = month.filter(onPeak).length;
    return month.map((at) =>
      slot(
        at,
        onPeak(at) ? (675.54 * share) / peakHours : (675.54 * (1 - share)) / (month.length - peakHours),
      ),
    );
  };

  it.each([
    [0.45, 96.58],
    [0.35, 88.14],
    [0.3, 83.92],
    [0.25, 79.7],
  ])('prints with a share of %d on-peak the cost %d', (share, printed) => {
    expect(monthBill(config, '2020-09', use(share)).totalMoney).toBe(printed);
  });

  it('prints the flat cost 88.98', () => {
    const flat = withTerms(siteWith({ tariff: { default: 0.111 } }, { zone }), { fixedPerMonth: 14 });
    expect(monthBill(flat, '2020-09', use(0.45)).totalMoney).toBe(88.98);
  });

  it('has its lines as worked by hand', () => {
    const bill = monthBill(config, '2020-09', use(0.45));
    // 675.54 × 0.45 = 303.993 kWh × 0.191 = 58.0627; 675.54 × 0.55 = 371.547 kWh × 0.066 = 24.5221
    expect(Object.fromEntries(bill.lines.map((entry) => [entry.what, entry.amountMoney]))).toEqual({
      'fixed charge': 14,
      'on-peak': 58.06,
      default: 24.52,
    });
    expect(bill.lines.find((entry) => entry.what === 'on-peak')?.quantity).toBeCloseTo(303.993, 9);
    expect(bill.heard).toBe(1);
  });
});

describe('Ontario summer time of use [ON]', () => {
  const season = ['05-01', '10-31'];
  const weekday = { days: WEEKDAYS, season, 'on-holidays': 'never' };
  const config = siteWith(
    {
      tariff: {
        default: 0.065,
        periods: [
          { name: 'on-peak', price: 0.132, from: '11:00', to: '17:00', ...weekday },
          { name: 'mid-peak', price: 0.094, from: '07:00', to: '11:00', ...weekday },
          { name: 'mid-peak', price: 0.094, from: '17:00', to: '19:00', ...weekday },
          { name: 'off-peak', price: 0.065, season },
        ],
        holidays: ['2018-07-02'],
      },
    },
    { zone: 'America/Toronto', currency: 'CAD' },
  );

  it('comes to the cents worked by hand for one kWh an hour through July 2018', () => {
    // July 2018: 22 weekdays, of which the 2nd is a holiday: 21 × 6 h on-peak = 126, 21 × 6 h mid = 126, rest of 744 = 492
    // 126 × 0.132 = 16.632 → 16.63; 126 × 0.094 = 11.844 → 11.84; 492 × 0.065 = 31.98; total 60.45
    const bill = monthBill(
      config,
      '2018-07',
      hours('2018-07-01T04:00Z', '2018-08-01T04:00Z').map((at) => slot(at, 1)),
    );
    expect(
      Object.fromEntries(bill.lines.map((entry) => [entry.what, [entry.quantity, entry.amountMoney]])),
    ).toEqual({
      'off-peak': [492, 31.98],
      'mid-peak': [126, 11.84],
      'on-peak': [126, 16.63],
    });
    expect(bill.totalMoney).toBe(60.45);
  });
});

describe('invented terms', () => {
  const tariff = {
    default: 0.2,
    'feed-in': 0.05,
    demand: { price: 7.5, over: 'PT15M', from: '16:00', to: '20:00' },
  };
  const config = siteWith({ tariff }, { zone: 'Europe/Madrid' });

  it('counts a 25-hour day in full and a month by its own clock', () => {
    const bill = monthBill(
      config,
      '2026-10',
      hours('2026-09-30T20:00Z', '2026-11-01T02:00Z').map((at) => slot(at, 1)),
    );
    expect(bill.lines[0].quantity).toBe(31 * 24 + 1);
    expect(bill.lines[0].amountMoney).toBe(149);
  });

  it('adds demand on the highest measured quarter hour, blocks, a daily charge and a credit', () => {
    const full = withTerms(config, { fixedPerDay: 0.11, blocks: [{ aboveKwh: 3, adds: 0.04 }] });
    const bill = monthBill(full, '2026-07', [
      slot(utc('2026-07-10T12:00Z'), 4), // 14:00, outside the measured hours
      slot(utc('2026-07-10T15:00Z'), 1.234), // 17:00: 1.234 kW
      slot(utc('2026-07-11T10:00Z'), 0, 2.5),
    ]);
    expect(bill.lines.map((entry) => [entry.what, entry.amountMoney])).toEqual([
      ['daily charge', 3.41], // 31 × 0.11
      ['default', 1.05], // 5.234 × 0.2 = 1.0468
      ['above 3 kWh', 0.09], // 2.234 × 0.04 = 0.08936
      ['demand', 9.26], // 1.234 × 7.5 = 9.255 → half up
      ['feed-in', -0.13], // 2.5 × 0.05 = 0.125 → half away from zero
    ]);
    expect(bill.totalMoney).toBe(13.68);
    expect(blockAdds([{ aboveKwh: 3, adds: 0.04 }], 2.9)).toBe(0);
    expect(blockAdds([{ aboveKwh: 3, adds: 0.04 }], 3)).toBe(0.04);
  });

  it('puts dated prices in one line at their mean', () => {
    const dated = [
      { startMs: utc('2026-07-10T12:00Z'), endMs: utc('2026-07-10T13:00Z'), buy: 0.5, sell: null },
      { startMs: utc('2026-07-10T13:00Z'), endMs: utc('2026-07-10T14:00Z'), buy: 0.1, sell: null },
    ];
    const energy = [slot(utc('2026-07-10T12:00Z'), 3), slot(utc('2026-07-10T13:00Z'), 1)];
    expect(monthBill(config, '2026-07', energy, dated).lines).toMatchObject([
      { what: 'dated prices', quantity: 4, price: 0.4, amountMoney: 1.6 },
    ]);
  });

  it('refuses a month that is none and an island', () => {
    expect(() => monthBill(config, '2026-13', [])).toThrow(/YYYY-MM/);
    expect(() => monthBill(siteWith({ island: { panels: '1 kW' } }), '2026-07', [])).toThrow(/island/);
  });
});

describe('rounding', () => {
  it.each([
    [1.005, 1.01],
    [0.125, 0.13],
    [-0.125, -0.13],
    [58.0627, 58.06],
    [0, 0],
    [-0.001, 0],
    [2.675, 2.68],
  ])('%d to %d', (amount, cents) => expect(roundMoney(amount)).toBe(cents));
});

const record = (at: string, gridPowerW: number | null, chillerPowerW: number | null = null) => ({
  atMs: utc(at),
  spanMs: 10 * 60_000,
  gridPowerW,
  chillerPowerW,
  pumpPowerW: null,
  fanPowerW: 30,
});

describe('energy by slot', () => {
  it('splits a record over the slots that it covers and keeps drawing and feeding apart', () => {
    const slots = energyBySlot(
      [record('2026-07-10T12:20Z', 600), record('2026-07-10T12:30Z', -1200)],
      15 * 60_000,
    );
    expect(slots.map((entry) => entry.heardMs / 60_000)).toEqual([5, 15]);
    const [first, second] = slots;
    expect(first.importKwh).toBeCloseTo(0.05, 12);
    expect(first.exportKwh).toBe(0);
    expect(second.importKwh).toBeCloseTo(0.05, 12);
    expect(second.exportKwh).toBeCloseTo(0.2, 12);
  });

  it('falls back to the plant without a grid meter', () => {
    const [only] = energyBySlot([record('2026-07-10T12:10Z', null, 570)], 15 * 60_000);
    expect(only.importKwh).toBeCloseTo(0.1, 12);
  });
});
