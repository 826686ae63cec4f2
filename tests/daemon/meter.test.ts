/** The meter of the daemon: the month's energy and the house's habits from stored cycles, each read once. */
import { describe, expect, it } from 'vitest';
import { Meter } from '../../src/daemon/meter.ts';
import type { CycleRecord } from '../../src/record.ts';
import { HOUR_MS, localMinuteOfDay, MINUTE_MS } from '../../src/time.ts';
import { baseRecord } from '../reports/night-story.ts';
import { siteWith, utc } from '../tariff/site.ts';

const QUARTER_MS = 15 * MINUTE_MS;
const ZONE = 'Europe/Madrid';

/** Quarter-hour records without end: a house of 300 W, 900 W from 20 to 21, and a machine of 500 W at night. */
function records(fromMs: number, toMs: number): CycleRecord[] {
  const made: CycleRecord[] = [];
  for (let at = Math.floor(fromMs / QUARTER_MS + 1) * QUARTER_MS; at <= toMs; at += QUARTER_MS) {
    const hour = localMinuteOfDay(ZONE, at - 1) / 60;
    const chillerPowerW = hour < 4 ? 500 : 0;
    const housePowerW = hour >= 20 && hour < 21 ? 900 : 300;
    made.push({
      ...baseRecord(at, QUARTER_MS),
      chillerPowerW,
      housePowerW,
      gridPowerW: housePowerW + chillerPowerW,
    });
  }
  return made;
}

describe('the meter', () => {
  const config = siteWith({ tariff: { default: 0.2, demand: { price: 5 } } });

  it('counts the month from its first minute on the clock of the meter, and its peak', () => {
    const meter = new Meter(config, { recordsBetween: records });
    // Three hours into July in Madrid: 3 × 0.8 kWh; June does not count.
    const { month, demand } = meter.at(utc('2026-07-01T01:00Z'));
    expect(month?.kwh).toBeCloseTo(2.4, 9);
    expect(month?.untilMs).toBe(utc('2026-07-31T22:00Z'));
    expect(demand?.peakKw).toBeCloseTo(0.8, 9);
    // By 21:15 the fourth hour of the machine and the evening have been added: 21.25 × 0.3 + 4 × 0.5 + 0.6.
    const later = meter.at(utc('2026-07-01T19:15Z'));
    expect(later.month?.kwh).toBeCloseTo(21.25 * 0.3 + 4 * 0.5 + 0.6, 9);
    expect(later.demand?.peakKw).toBeCloseTo(0.9, 9);
    // A new month starts afresh.
    expect(meter.at(utc('2026-07-31T23:00Z')).month?.kwh).toBeCloseTo(0.8, 9);
  });

  it('knows the habits of the house, and reads each record once', () => {
    let read = 0;
    const counted = (fromMs: number, toMs: number): CycleRecord[] => {
      const some = records(fromMs, toMs);
      read += some.length;
      return some;
    };
    const meter = new Meter(config, { recordsBetween: counted });
    const now = utc('2026-07-20T12:00Z');
    const { houseW } = meter.at(now);
    expect(houseW?.(utc('2026-07-21T18:30Z'))).toBeCloseTo(900, 6);
    expect(houseW?.(utc('2026-07-21T10:30Z'))).toBeCloseTo(300, 6);
    const first = read;
    meter.at(now + HOUR_MS);
    expect(read - first).toBe(4);
  });

  it('says nothing of the house before it has heard a day', () => {
    const young = (fromMs: number, toMs: number): CycleRecord[] =>
      records(Math.max(fromMs, utc('2026-07-20T00:00Z')), toMs);
    expect(new Meter(config, { recordsBetween: young }).at(utc('2026-07-20T12:00Z')).houseW).toBeNull();
  });
});
