/** Event shape: OpenADR 3.1.1 specification (openadr3.yaml, User Guide section 7.3). */
import { describe, expect, it } from 'vitest';
import { RimeholdError } from '../../src/errors.ts';
import { HOUR_MS } from '../../src/time.ts';
import { parseDatedPrices } from '../../src/tariff/dated.ts';
import { utc } from './site.ts';

const hourly = (count: number): number[] => Array.from({ length: count }, (_, i) => i / 100);
const event = (
  duration: string,
  values: unknown[],
  more: Record<string, unknown> = {},
): Record<string, unknown> => ({
  programID: 'cabin',
  eventName: '2026-12-02',
  intervalPeriod: { start: '2026-12-02T07:00:00Z', duration },
  payloadDescriptors: [
    { objectType: 'EVENT_PAYLOAD_DESCRIPTOR', payloadType: 'PRICE', units: 'KWH', currency: 'USD' },
  ],
  intervals: [{ id: 0, payloads: [{ type: 'PRICE', values }] }],
  ...more,
});

const payloads = (value: number): unknown[] => [{ type: 'PRICE', values: [value] }];

function refusal(value: unknown): string {
  try {
    parseDatedPrices(value, 'USD');
  } catch (error) {
    if (error instanceof RimeholdError && error.code === 'payload') return error.message;
    throw error;
  }
  return 'accepted';
}

describe('an event', () => {
  it('splits its duration evenly over several values', () => {
    const prices = parseDatedPrices(event('PT24H', hourly(24)), 'USD');
    expect(prices).toHaveLength(24);
    expect(prices[5]).toEqual({
      startMs: utc('2026-12-02T12:00Z'),
      endMs: utc('2026-12-02T13:00Z'),
      buy: 0.05,
      sell: null,
    });
  });

  it.each([23, 25])('takes a change day of %d hours', (hours) => {
    const prices = parseDatedPrices(event(`PT${hours}H`, hourly(hours)), 'USD');
    expect(prices.at(-1)?.endMs).toBe(utc('2026-12-02T07:00Z') + hours * HOUR_MS);
  });

  it('runs intervals one after the other from the event, and lets an interval have its own period', () => {
    const intervals = [
      { id: 0, payloads: payloads(0.1) },
      { id: 1, payloads: payloads(0.2) },
      { id: 2, payloads: payloads(0.3), intervalPeriod: { start: '2026-12-03T00:00:00Z', duration: 'PT2H' } },
      { id: 3, payloads: payloads(0.4) },
    ];
    const prices = parseDatedPrices(event('PT1H', [], { intervals }), 'USD');
    expect(
      prices.map(({ startMs, endMs, buy }) => [
        (startMs - utc('2026-12-02T07:00Z')) / HOUR_MS,
        (endMs - startMs) / HOUR_MS,
        buy,
      ]),
    ).toEqual([
      [0, 1, 0.1],
      [1, 1, 0.2],
      [17, 2, 0.3],
      [19, 1, 0.4],
    ]);
  });

  it('reads feed-in prices and passes over what is no price', () => {
    const exported = [
      { type: 'EXPORT_PRICE', values: [0.03] },
      { type: 'GHG', values: [400] },
    ];
    expect(
      parseDatedPrices(event('PT1H', [], { intervals: [{ id: 0, payloads: exported }] }), 'USD'),
    ).toMatchObject([{ buy: null, sell: 0.03 }]);
  });

  it('puts the event of higher priority (lower number) first', () => {
    const list = [
      event('PT1H', [0.5]),
      event('PT1H', [0.1], { priority: 3 }),
      event('PT1H', [0.2], { priority: 0 }),
    ];
    expect(parseDatedPrices(list, 'USD').map((price) => price.buy)).toEqual([0.2, 0.1, 0.5]);
  });
});

describe('refuses in one sentence that names the place', () => {
  const interval = (start: unknown, duration: unknown): unknown =>
    event('PT1H', [0.1], { intervalPeriod: { start, duration } });
  it.each<[string, unknown, RegExp]>([
    ['no object', 'hello', /an object/],
    ['null', null, /an object/],
    ['no intervals', event('PT1H', [0.1], { intervals: [] }), /\/intervals/],
    ['24 values in a 23-hour day', event('PT23H', hourly(24)), /divides 23 h/],
    ['a loop', event('PT24H', hourly(24), { duration: 'P30D' }), /looped duration/],
    ['an endless interval', interval('2026-12-02T07:00:00Z', 'P9999Y'), /duration such as/],
    ['a start of "now"', interval('0001-01-01T00:00:00Z', 'PT1H'), /dated start/],
    ['a start without zone', interval('2026-12-02T07:00:00', 'PT1H'), /dated start/],
    ['a price as text', event('PT1H', ['0.1']), /a price per kWh/],
    ['a price per MWh', event('PT1H', [180]), /between -100 and 100/],
    ['no number', event('PT1H', [Number.NaN]), /a price per kWh/],
    [
      'another currency',
      event('PT1H', [0.1], { payloadDescriptors: [{ payloadType: 'PRICE', currency: 'EUR' }] }),
      /currency "USD"/,
    ],
    [
      'another unit',
      event('PT1H', [0.1], { payloadDescriptors: [{ payloadType: 'PRICE', units: 'MWH' }] }),
      /"KWH"/,
    ],
    ['no period anywhere', event('PT1H', [0.1], { intervalPeriod: null }), /intervalPeriod/],
    ['a broken priority', event('PT1H', [0.1], { priority: -1 }), /priority/],
    [
      'a randomised start',
      event('PT1H', [0.1], {
        intervalPeriod: { start: '2026-12-02T07:00:00Z', duration: 'PT1H', randomizeStart: 'PT5M' },
      }),
      /randomised/,
    ],
    ['more values than a year has hours', event('PT10000H', hourly(10_000)), /at most 9000/],
  ])('%s', (_, value, sentence) => expect(refusal(value)).toMatch(sentence));
});
