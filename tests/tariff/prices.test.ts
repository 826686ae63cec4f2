import { describe, expect, it } from 'vitest';
import { HOUR_MS, MINUTE_MS } from '../../src/time.ts';
import { priceParts, priceSlots, type PriceSlot } from '../../src/tariff/prices.ts';
import { siteWith, utc } from './site.ts';

const QUARTER = 15 * MINUTE_MS;
/** The paste form of an invented three-period tariff. */
const threePeriods = {
  default: 0.18,
  periods: [
    { name: 'low', price: 0.11, from: '22:00', to: '06:00' },
    {
      name: 'peak',
      price: 0.31,
      from: '15:00',
      to: '20:00',
      days: ['MO', 'TU', 'WE', 'TH', 'FR'],
      season: ['06-01', '09-30'],
      'on-holidays': 'never',
    },
  ],
  holidays: ['2026-07-14'],
  'feed-in': 0.04,
};
const site = siteWith({ tariff: threePeriods });
const oneSlot = (at: string, slotMs = QUARTER): PriceSlot => priceSlots(site, utc(at), slotMs, 1)[0];

describe('periods', () => {
  it.each([
    ['a summer weekday afternoon', '2026-07-15T13:00Z', 'peak', 0.31],
    ['its last quarter', '2026-07-15T17:45Z', 'peak', 0.31],
    ['half-open: the next belongs to the default', '2026-07-15T18:00Z', 'default', 0.18],
    ['a holiday', '2026-07-14T13:00Z', 'default', 0.18],
    ['a Saturday', '2026-07-18T13:00Z', 'default', 0.18],
    ['first day of the season', '2026-06-01T13:00Z', 'peak', 0.31],
    ['last day of the season', '2026-09-30T13:00Z', 'peak', 0.31],
    ['the day after it', '2026-10-01T13:00Z', 'default', 0.18],
    ['before midnight', '2026-07-15T20:00Z', 'low', 0.11],
    ['after midnight', '2026-07-16T03:45Z', 'low', 0.11],
  ])('%s', (_, at, period, buy) => expect(oneSlot(at)).toMatchObject({ period, buy, sell: 0.04 }));

  it('judges day and season on the start day of a period that crosses midnight', () => {
    const night = siteWith({
      tariff: {
        default: 0.2,
        periods: [
          { name: 'night', price: 0.1, from: '22:00', to: '06:00', days: ['FR'], season: ['07-01', '07-31'] },
        ],
      },
    });
    const buy = (at: string): number => priceSlots(night, utc(at), QUARTER, 1)[0].buy;
    expect(buy('2026-07-31T21:00Z')).toBe(0.1);
    expect(buy('2026-08-01T03:00Z')).toBe(0.1); // Saturday in August, but it began on Friday in July
    expect(buy('2026-07-30T23:00Z')).toBe(0.2); // Friday 01:00, which began on Thursday
  });

  it('lets the period written first win, whichever begins first', () => {
    const both = [
      { name: 'a', price: 0.3, from: '12:00', to: '14:00' },
      { name: 'b', price: 0.1, from: '00:00', to: '00:00' },
    ];
    const names = (periods: typeof both): string[] => {
      const parts = priceParts(
        siteWith({ tariff: { default: 9, periods } }),
        utc('2026-07-15T22:00Z'),
        utc('2026-07-16T22:00Z'),
      );
      return parts
        .filter((part, i) => i === 0 || parts[i - 1].period !== part.period)
        .map((part) => part.period);
    };
    expect(names(both)).toEqual(['b', 'a', 'b']);
    expect(names(both.toReversed())).toEqual(['b']);
  });

  it('runs a season over the new year', () => {
    const winter = siteWith({
      tariff: { default: 1, periods: [{ name: 'w', price: 2, season: ['11-01', '03-31'] }] },
    });
    const buy = (at: string): number => priceSlots(winter, utc(at), QUARTER, 1)[0].buy;
    expect(
      ['2026-12-31T12:00Z', '2027-01-01T12:00Z', '2027-03-31T12:00Z', '2027-04-01T12:00Z'].map(buy),
    ).toEqual([2, 2, 2, 1]);
  });

  it('holds only on holidays where asked', () => {
    const holiday = siteWith({
      tariff: {
        default: 1,
        periods: [{ name: 'h', price: 2, 'on-holidays': 'only' }],
        holidays: ['2026-12-25'],
      },
    });
    const buy = (at: string): number => priceSlots(holiday, utc(at), QUARTER, 1)[0].buy;
    expect([buy('2026-12-25T12:00Z'), buy('2026-12-26T12:00Z')]).toEqual([2, 1]);
  });

  it('weighs by time where a period cuts a slot', () => {
    const odd = siteWith({
      tariff: { default: 0.1, periods: [{ name: 'odd', price: 0.4, from: '10:05', to: '11:00' }] },
    });
    const [slot] = priceSlots(odd, utc('2026-07-15T08:00Z'), QUARTER, 1);
    expect(slot.buy).toBeCloseTo((5 * 0.1 + 10 * 0.4) / 15, 12);
    expect(slot.period).toBe('odd');
    expect(priceSlots(odd, utc('2026-07-15T08:00Z'), HOUR_MS, 1)[0].buy).toBeCloseTo(
      (5 * 0.1 + 55 * 0.4) / 60,
      12,
    );
  });

  it('refuses a season that is not two days', () => {
    const bad = siteWith({ tariff: { default: 1, periods: [{ name: 'x', price: 2, season: ['06-01'] }] } });
    expect(() => priceSlots(bad, utc('2026-07-15T08:00Z'), QUARTER, 1)).toThrow(/first and a last day/);
  });
});

describe('daylight-saving days', () => {
  const night = { default: 0.2, periods: [{ name: 'night', price: 0.1, from: '22:00', to: '06:00' }] };
  const nightHours = (zone: string, from: string): number =>
    priceSlots(siteWith({ tariff: night }, { zone }), utc(from), QUARTER, 96).filter(
      (slot) => slot.buy === 0.1,
    ).length / 4;

  it('has 7 and 9 hours of night across the change (instants: Python zoneinfo 2026f, temporal-polyfill 1.0.8)', () => {
    expect(nightHours('Europe/Berlin', '2026-03-28T12:00Z')).toBe(7);
    expect(nightHours('Europe/Berlin', '2026-10-24T12:00Z')).toBe(9);
    expect(nightHours('Europe/Berlin', '2026-07-24T12:00Z')).toBe(8);
  });

  it('does not reopen a period in the repeated hour', () => {
    const early = siteWith(
      { tariff: { default: 0.2, periods: [{ name: 'early', price: 0.1, from: '00:00', to: '01:30' }] } },
      { zone: 'America/New_York' },
    );
    const held = priceSlots(early, utc('2026-11-01T04:00Z'), QUARTER, 16).filter(
      (slot) => slot.period === 'early',
    );
    expect(held.map((slot) => slot.startMs)).toEqual(
      Array.from({ length: 6 }, (_, i) => utc('2026-11-01T04:00Z') + i * QUARTER),
    );
  });

  it("follows the meter's clock where it differs from the site's", () => {
    const meter = siteWith(
      {
        tariff: {
          zone: 'Etc/GMT',
          default: 0.3,
          periods: [{ name: 'night', price: 0.1, from: '00:30', to: '07:30' }],
        },
      },
      { zone: 'Europe/London' },
    );
    const parts = priceParts(meter, utc('2026-07-01T00:00Z'), utc('2026-07-01T12:00Z'));
    expect(parts.find((part) => part.period === 'night')).toMatchObject({
      startMs: utc('2026-07-01T00:30Z'),
      endMs: utc('2026-07-01T07:30Z'),
    });
  });
});

describe('dated prices', () => {
  const dated = [
    { startMs: utc('2026-07-15T10:00Z'), endMs: utc('2026-07-15T14:00Z'), buy: 0.05, sell: null },
  ];

  it('hold where there are any, and the periods take over where they end', () => {
    const slots = priceSlots(site, utc('2026-07-15T13:00Z'), HOUR_MS, 3, dated);
    expect(slots.map(({ buy, source }) => [buy, source])).toEqual([
      [0.05, 'dated'],
      [0.31, 'period'],
      [0.31, 'period'],
    ]);
  });

  it('leave the feed-in price alone unless they carry one', () => {
    const both = [{ ...dated[0], sell: 0.02 }];
    expect(priceSlots(site, utc('2026-07-15T10:00Z'), HOUR_MS, 1, dated)[0].sell).toBe(0.04);
    expect(priceSlots(site, utc('2026-07-15T10:00Z'), HOUR_MS, 1, both)[0].sell).toBe(0.02);
  });
});

it('prices an island by wear and sells nothing', () => {
  const island = siteWith({
    island: { panels: '2.4 kW', battery: { capacity: '5 kWh', wear: '0.06 EUR/kWh' } },
  });
  expect(priceSlots(island, utc('2026-07-15T10:00Z'), QUARTER, 2)).toMatchObject([
    { buy: 0.06, sell: 0, source: 'island' },
    { buy: 0.06, sell: 0, source: 'island' },
  ]);
});

it('covers 48 hours without a gap, every part longer than nothing', () => {
  const parts = priceParts(site, utc('2026-03-28T12:07Z'), utc('2026-03-30T12:07Z'));
  for (const [i, part] of parts.entries()) {
    expect(part.endMs).toBeGreaterThan(part.startMs);
    if (i > 0) expect(part.startMs).toBe(parts[i - 1].endMs);
  }
});

describe('blocks by monthly energy', () => {
  const blocks = [
    { above: '100 kWh', adds: 0.05 },
    { above: '200 kWh', adds: 0.02 },
  ];
  const config = siteWith({ tariff: { default: 0.2, blocks } });
  // 31 July, 23:00 in Madrid; the month ends at 22:00Z.
  const start = utc('2026-07-31T21:00Z');
  const buys = (kwh: number | null): number[] =>
    priceSlots(
      config,
      start,
      HOUR_MS,
      2,
      [],
      kwh === null ? null : { kwh, untilMs: utc('2026-07-31T22:00Z') },
    ).map(({ buy }) => buy);

  it('add to the next kWh once the month has come so far, and not to that of the next month', () => {
    expect(buys(99.9)).toEqual([0.2, 0.2]);
    expect(buys(100)).toEqual([0.25, 0.2]);
    expect(buys(250)[0]).toBeCloseTo(0.27, 12);
    expect(buys(null)).toEqual([0.2, 0.2]);
  });
});
