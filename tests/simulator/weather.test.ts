import { describe, expect, it } from 'vitest';
import { RimeholdError } from '../../src/errors.ts';
import { seededWeather } from '../../src/simulator/seeded-weather.ts';
import { weatherFromGreensboro, weatherFromNewark } from '../../src/simulator/weather-files.ts';
import { HOUR_MS } from '../../src/time.ts';
import { openData, START_MS } from './site.ts';

const PLACE = { latitudeDeg: 38.4, longitudeDeg: -2.9, elevationM: 1080 };
const hours = (count: number): number[] => Array.from({ length: count }, (_, i) => START_MS + i * HOUR_MS);

const meanOf = (values: number[]): number => values.reduce((a, b) => a + b, 0) / values.length;

describe('seeded weather', () => {
  it('is the same in whatever order it is asked', () => {
    const forward = seededWeather({ seed: 7, ...PLACE });
    const backward = seededWeather({ seed: 7, ...PLACE });
    const instants = hours(100);
    const seen = instants.map((ms) => forward.at(ms));
    expect([...instants].toReversed().map((ms) => backward.at(ms))).toEqual(seen.toReversed());
  });

  it('differs between seeds and between days', () => {
    const one = hours(240).map((ms) => seededWeather({ seed: 1, ...PLACE }).at(ms).outdoorC);
    const two = hours(240).map((ms) => seededWeather({ seed: 2, ...PLACE }).at(ms).outdoorC);
    expect(one).not.toEqual(two);
    const noons = Array.from({ length: 10 }, (_, day) => one[24 * day]);
    expect(Math.max(...noons) - Math.min(...noons)).toBeGreaterThan(2);
  });

  it('has summer days with afternoons hotter than nights, sun by day only, and humidity within bounds', () => {
    const weather = seededWeather({ seed: 3, ...PLACE, hotDayC: 35, rangeK: 14 });
    const samples = hours(24 * 30).map((ms) => ({ ms, ...weather.at(ms) }));
    const byHour = (hour: number) => samples.filter((s) => new Date(s.ms).getUTCHours() === hour);
    const range = meanOf(byHour(15).map((s) => s.outdoorC)) - meanOf(byHour(5).map((s) => s.outdoorC));
    expect(range).toBeGreaterThan(8);
    expect(range).toBeLessThan(15);
    expect(Math.max(...samples.map((s) => s.outdoorC))).toBeLessThan(42);
    expect(Math.max(...byHour(0).map((s) => s.ghiWPerM2))).toBe(0);
    expect(Math.max(...byHour(12).map((s) => s.ghiWPerM2))).toBeGreaterThan(850);
    for (const s of samples) {
      expect(s.outdoorRhPct).toBeGreaterThan(3);
      expect(s.outdoorRhPct).toBeLessThanOrEqual(100);
    }
  });

  it('passes midnight and every other minute without a leap', () => {
    const weather = seededWeather({ seed: 4, ...PLACE });
    let last = weather.at(START_MS).outdoorC;
    for (let minute = 1; minute < 5 * 1440; minute++) {
      const next = weather.at(START_MS + minute * 60_000).outdoorC;
      expect(Math.abs(next - last)).toBeLessThan(0.1);
      last = next;
    }
  });
});

describe('the Newark file', () => {
  const text = openData('weather/newark-2013-hourly.csv');

  it.skipIf(!text)('has the hours, July and gaps that its notes tell of', () => {
    const weather = weatherFromNewark(text ?? '');
    // Notes of the open data: 8,703 hours of 2013, July mean 27 °C, maximum 37.8 °C, a few hours missing.
    const bare = (text ?? '').split('\n').filter((line) => /^[^,]+,(,|[^,]+,,)/.test(line)).length;
    expect(weather.hours + bare).toBe(8703);
    expect(bare).toBeLessThan(5);
    const july = Array.from(
      { length: 31 * 24 },
      (_, i) => weather.at(Date.UTC(2013, 6, 1, 5) + i * HOUR_MS).outdoorC,
    );
    expect(july.reduce((a, b) => a + b, 0) / july.length).toBeCloseTo(27, 0);
    const all = Array.from({ length: 8700 }, (_, i) => weather.at(weather.startMs + i * HOUR_MS).outdoorC);
    expect(Math.max(...all)).toBeCloseTo(37.8, 1);
    const spanned = (weather.endMs - weather.startMs) / HOUR_MS + 1;
    const inLong = weather.longGaps.reduce((sum, gap) => sum + (gap.toMs - gap.fromMs) / HOUR_MS - 1, 0);
    expect(weather.hours + weather.interpolatedHours + inLong).toBe(spanned);
    expect(spanned).toBeGreaterThan(weather.hours);
  });

  it.skipIf(!text)('says where it ends instead of making weather up', () => {
    const weather = weatherFromNewark(text ?? '');
    expect(() => weather.at(Date.UTC(2014, 6, 1))).toThrow(RimeholdError);
  });

  it('names long gaps and fills short ones', () => {
    const weather = weatherFromNewark(
      [
        'time,dry_bulb_c,dew_point_c,rh_pct,wind_ms,pressure_hpa,precip_mm',
        '2013-07-01T00:00:00Z,20,10,53,2,1012,0',
        '2013-07-01T02:00:00Z,24,10,41,2,1012,0',
        '2013-07-01T05:00:00Z,,,,3,,0',
        '2013-07-01T09:00:00Z,31,10,27,,,0',
      ].join('\n'),
    );
    expect(weather.at(Date.UTC(2013, 6, 1, 1)).outdoorC).toBe(22);
    expect(weather.interpolatedHours).toBe(1);
    expect(weather.longGaps).toEqual([{ fromMs: Date.UTC(2013, 6, 1, 2), toMs: Date.UTC(2013, 6, 1, 9) }]);
  });

  it.each([
    ['another header', 'a,b\n1,2'],
    [
      'a word for a number',
      'time,dry_bulb_c,dew_point_c,rh_pct,wind_ms,pressure_hpa,precip_mm\n2013-07-01T00:00:00Z,warm,1,1,1,1,0',
    ],
    ['no time', 'time,dry_bulb_c,dew_point_c,rh_pct,wind_ms,pressure_hpa,precip_mm\nnoon,20,10,50,1,1000,0'],
  ])('refuses %s in one sentence', (_, csv) => {
    expect(() => weatherFromNewark(csv)).toThrow(/^Expected/);
  });
});

describe('the Greensboro file', () => {
  const text = openData('weather/greensboro-tmy3-hourly.csv');

  it.skipIf(!text)('puts its hours at local standard time, in any year', () => {
    const weather = weatherFromGreensboro(text ?? '');
    // First line: 1 January, the hour ending 01:00 at UTC−5, 10.0 °C.
    expect(weather.at(Date.UTC(2026, 0, 1, 6)).outdoorC).toBeCloseTo(10, 9);
    expect(weather.at(Date.UTC(2031, 0, 1, 6)).outdoorC).toBeCloseTo(10, 9);
    // After a 29 February the dates stay with their own day.
    const july = (year: number): number => weather.at(Date.UTC(year, 6, 4, 18, 30)).outdoorC;
    expect(july(2028)).toBe(july(2027));
  });

  it.skipIf(!text)('has its sun highest at local noon', () => {
    const weather = weatherFromGreensboro(text ?? '');
    const sums = new Float64Array(24);
    for (let hour = 0; hour < 24 * 31; hour++) {
      const ms = Date.UTC(2026, 6, 1) + hour * HOUR_MS;
      sums[new Date(ms).getUTCHours()] += weather.at(ms).ghiWPerM2;
    }
    // Solar noon at 79.95 W is 17:20 UTC in July plus the equation of time (6 min).
    const highest = sums.indexOf(Math.max(...sums));
    expect(highest).toBeGreaterThanOrEqual(16);
    expect(highest).toBeLessThanOrEqual(19);
    expect(weather.at(Date.UTC(2026, 6, 1, 6)).ghiWPerM2).toBe(0);
  });
});
