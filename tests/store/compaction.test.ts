import * as fc from 'fast-check';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import type { Reading } from '../../src/points.ts';
import { openStore, type Store } from '../../src/store/store.ts';
import { thin } from '../../src/store/thin.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS, nightOf } from '../../src/time.ts';
import { tellNight, tellPlan } from '../reports/night-story.ts';
import { opened, scratchFile, scratchFolder } from './scratch.ts';

const T0 = Date.UTC(2026, 6, 14, 10);
const ZONE = 'Europe/Madrid';

function compactAll(store: Store, nowMs: number): number {
  let steps = 0;
  for (;;) {
    const result = store.compact(nowMs, 7);
    steps += result.steps;
    if (result.done) return steps;
  }
}

function meanOf(readings: readonly Reading[]): number {
  return readings.reduce((sum, reading) => sum + reading.value, 0) / readings.length;
}

describe('readings', () => {
  it('become minute means, then quarter-hour means, and no younger reading is touched', () => {
    const store = opened(scratchFile());
    const old: Reading[] = Array.from({ length: 720 }, (_, i) => ({
      point: 'leaving-water',
      atMs: T0 + i * 10_000,
      value: 4 + Math.sin(i / 50),
    }));
    const young: Reading[] = [{ point: 'leaving-water', atMs: T0 + 15 * DAY_MS, value: 7 }];
    store.addReadings([...old, ...young]);
    store.flush();
    expect(compactAll(store, T0 + 15 * DAY_MS)).toBeGreaterThan(0);
    const minutes = store.readingsBetween(0, T0 + DAY_MS);
    expect(minutes).toHaveLength(120);
    expect(minutes[0].atMs).toBe(T0 + MINUTE_MS / 2);
    expect(minutes[0].value).toBeCloseTo(meanOf(old.slice(0, 6)), 12);
    expect(meanOf(minutes)).toBeCloseTo(meanOf(old), 12);
    expect(store.readingsBetween(T0 + DAY_MS, T0 + 16 * DAY_MS)).toEqual(young);
    expect(compactAll(store, T0 + 15 * DAY_MS)).toBe(0);

    compactAll(store, T0 + 62 * DAY_MS);
    const quarters = store.readingsBetween(0, T0 + DAY_MS);
    expect(quarters).toHaveLength(8);
    expect(meanOf(quarters)).toBeCloseTo(meanOf(old), 12);
    expect(compactAll(store, T0 + 62 * DAY_MS)).toBe(0);
  });

  it('average late ones in, wherever the first pass was', () => {
    const reading = fc.record({
      point: fc.constant('bank-bottom' as const),
      atMs: fc.integer({ min: 0, max: 3600 }).map((s) => T0 + s * 1000),
      value: fc.double({ min: -8, max: 45, noNaN: true }),
    });
    const distinct = fc.uniqueArray(reading, { maxLength: 60, selector: (one) => one.atMs });
    fc.assert(
      fc.property(distinct, fc.nat({ max: 60 }), (readings, cut) => {
        const once = openStore(join(scratchFolder(), 'once.db'), { siteId: 'juniper' });
        once.addReadings(readings);
        once.flush();
        compactAll(once, T0 + 20 * DAY_MS);
        const twice = openStore(join(scratchFolder(), 'twice.db'), { siteId: 'juniper' });
        for (const part of [readings.slice(0, cut), readings.slice(cut)]) {
          twice.addReadings(part);
          twice.flush();
          compactAll(twice, T0 + 20 * DAY_MS);
        }
        const [a, b] = [once, twice].map((store) => store.readingsBetween(0, T0 + DAY_MS));
        once.close();
        twice.close();
        expect(b.map((one) => one.atMs)).toEqual(a.map((one) => one.atMs));
        for (const [i, one] of a.entries()) expect(b[i].value).toBeCloseTo(one.value, 9);
      }),
      { numRuns: 6 },
    );
  });

  it('of true and false stay true or false', () => {
    const store = opened(scratchFile());
    store.addReadings(
      Array.from({ length: 60 }, (_, i) => ({
        point: 'ice-at-electrode',
        atMs: T0 + i * 1000,
        value: i < 40 ? 0 : 1,
      })),
    );
    store.flush();
    compactAll(store, T0 + 20 * DAY_MS);
    expect(store.readingsBetween(0, T0 + DAY_MS).map((one) => one.value)).toEqual([0]);
  });
});

describe('records', () => {
  const night = nightOf(ZONE, '2026-07-14');

  it('are thinned to quarter hours without changing a sum, idempotently', () => {
    const full = tellNight({ zone: ZONE, night });
    const thinned = thin(full);
    const sum = (records: typeof full, of: (one: (typeof full)[number]) => number): number =>
      records.reduce((total, one) => total + of(one), 0);
    expect(thinned.length).toBeLessThan(110);
    expect(sum(thinned, (one) => one.spanMs)).toBe(sum(full, (one) => one.spanMs));
    for (const field of ['chargingW', 'dischargingW', 'leakW', 'chillerPowerW', 'deliveredW'] as const) {
      const [a, b] = [full, thinned].map((records) => sum(records, (one) => (one[field] ?? 0) * one.spanMs));
      expect(b / a, field).toBeCloseTo(1, 9);
    }
    expect(sum(thinned, (one) => one.warmKh)).toBeCloseTo(
      sum(full, (one) => one.warmKh),
      9,
    );
    expect(thinned.at(-1)?.iceOnHandKwh).toBe(full.at(-1)?.iceOnHandKwh);
    expect(thin(thinned)).toEqual(thinned);
  });

  it('and plans are thinned in the store by age, and a second pass finds nothing to do', () => {
    const file = scratchFile();
    const store = opened(file);
    const full = tellNight({ zone: ZONE, night });
    for (const record of full) store.addRecord(record);
    for (let at = night.startMs; at < night.endMs; at += 15 * MINUTE_MS) store.addPlan(tellPlan(ZONE, at));
    store.flush();
    expect(store.plansBetween(0, Infinity)).toHaveLength(96);
    compactAll(store, night.endMs + 30 * DAY_MS);
    expect(store.recordsBetween(0, Infinity)).toHaveLength(2880);
    expect(store.plansBetween(0, Infinity)).toHaveLength(24);
    compactAll(store, night.endMs + 37 * DAY_MS);
    const kept = store.recordsBetween(0, Infinity);
    expect(kept.length).toBeLessThan(110);
    expect(kept.map((one) => one.command)).toEqual(thin(full).map((one) => one.command));
    expect(compactAll(store, night.endMs + 37 * DAY_MS)).toBe(0);
    compactAll(store, night.endMs + 70 * DAY_MS);
    // 12:00 in Madrid is 10:00 UTC: nine three-hour stretches of UTC are touched.
    expect(store.plansBetween(0, Infinity)).toHaveLength(9);
    store.close();
    const again = opened(file);
    expect(compactAll(again, night.endMs + 70 * DAY_MS)).toBe(0);
    expect(again.recordsBetween(0, Infinity)).toEqual(kept);
  });

  it('of a clock that stood in 1970 are no trouble', () => {
    const store = opened(scratchFile());
    for (const record of tellNight({ zone: ZONE, night: nightOf(ZONE, '1970-01-01'), stepMs: HOUR_MS / 4 }))
      store.addRecord(record);
    store.addReadings([{ point: 'leaving-water', atMs: -5, value: 1 }]);
    store.flush();
    const steps = compactAll(store, T0);
    expect(steps).toBeLessThan(40);
    expect(store.recordsBetween(-DAY_MS, 3 * DAY_MS)).toHaveLength(96);
    expect(store.readingsBetween(-DAY_MS * 2, 0)).toHaveLength(1);
  });
});
