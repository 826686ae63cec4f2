import { describe, expect, it } from 'vitest';
import { fromWall, HOUR_MS, nightOf } from '../../src/time.ts';
import { age, countdown, createFormat, plain, span } from '../../src/web/page/format.ts';
import { zoneOffsets } from '../../src/web/zone.ts';

const ZONE = 'Europe/Madrid';
const nowMs = fromWall(ZONE, 2026, 7, 14, 21 * 60);
const of = (units: 'SI' | 'IP'): ReturnType<typeof createFormat> =>
  createFormat({ units, currency: 'EUR', offsets: zoneOffsets(ZONE, nowMs) });

describe('figures as the page writes them', () => {
  it('writes SI and inch-pound, with a true minus and no negative zero', () => {
    expect(of('SI').temperature(-1.25)).toBe('−1.3 °C');
    expect(of('IP').temperature(26)).toBe('78.8 °F');
    expect(of('IP').difference(0.5)).toBe('0.90 °F');
    // 1 kWh = 3412.14 BTU, from 1 BTU(IT) = 1055.05585262 J (ISO 31-4).
    expect(of('IP').energy(1)).toBe('3.4 kBTU');
    expect(of('IP').value(12, 'L/min')).toBe('3.17 gal/min');
    expect(of('SI').value(1, 'true/false')).toBe('yes');
    expect(plain(-0.001, 2)).toBe('0.00');
    expect(of('SI').temperature(null)).toBe('not known');
    expect(of('IP').typedTemperatureC(78.8)).toBeCloseTo(26, 9);
  });

  it('writes spans, ages and countdowns', () => {
    expect([span(80 * 60_000), span(-60_000), span(200 * 60_000), span(72 * HOUR_MS)]).toEqual([
      '80 minutes',
      '1 minute',
      '3 h 20 min',
      '3 days',
    ]);
    expect([age(12_000), age(240_000), age(3 * HOUR_MS), age(null)]).toEqual([
      '12 s',
      '4 min',
      '3 h',
      'not known',
    ]);
    expect([countdown(2_530_000), countdown(3_600_000), countdown(-5)]).toEqual([
      '42:10',
      '1:00:00',
      '00:00',
    ]);
  });
});

describe('times of the site, whatever the viewer’s device thinks', () => {
  it.each(['2026-07-14', '2026-03-28', '2025-10-25'])('finds both noons of the night of %s', (date) => {
    const night = nightOf(ZONE, date);
    expect(of('SI').noonMs(date)).toBe(night.startMs);
    expect(of('SI').noonMs(date, 1)).toBe(night.endMs);
  });

  it('names hours through both clock changes: one is left out, one comes twice', () => {
    const format = of('SI');
    const hours = (startMs: number, count: number): string[] =>
      Array.from({ length: count }, (_, i) => format.clock(startMs + i * HOUR_MS));
    expect(hours(fromWall(ZONE, 2026, 3, 29, 0), 4)).toEqual(['00:00', '01:00', '03:00', '04:00']);
    expect(hours(fromWall(ZONE, 2025, 10, 26, 60), 4)).toEqual(['01:00', '02:00', '02:00', '03:00']);
    expect(format.nextHour(nowMs + 1)).toBe(nowMs + HOUR_MS);
  });

  it('adds the weekday when the hour alone would mislead', () => {
    const format = of('SI');
    expect(format.when(nowMs + 5 * HOUR_MS, nowMs)).toBe('02:00');
    expect(format.when(nowMs + 20 * HOUR_MS, nowMs)).toBe('Wed 17:00');
    expect(format.when(nowMs - 7 * HOUR_MS, nowMs)).toBe('Tue 14:00');
  });
});
