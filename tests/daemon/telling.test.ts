/** What the owner tells of the bank: taken at once, lived through again in its place, taken back without a trace. */
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { SiteConfig } from '../../src/config.ts';
import { replay } from '../../src/daemon/rewind.ts';
import { Tellings } from '../../src/daemon/telling.ts';
import { createEstimator, type Estimator, type IceEstimate } from '../../src/estimation/estimator.ts';
import type { Reading } from '../../src/points.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import { openStore, type Store } from '../../src/store/store.ts';
import { HOUR_MS, MINUTE_MS } from '../../src/time.ts';

const START_MS = Date.UTC(2026, 6, 14, 10);
const SEED = 1;

function juniper(): SiteConfig {
  const parsed = parseSiteFile(readFileSync(join(import.meta.dirname, '../../config/juniper.yaml'), 'utf8'));
  if (!parsed.ok) throw new Error('config/juniper.yaml has faults');
  return parsed.config;
}

/** A bank at rest, heard once a minute. */
function restUntil(store: Store, estimator: Estimator, fromMs: number, toMs: number): void {
  for (let atMs = fromMs + MINUTE_MS; atMs <= toMs; atMs += MINUTE_MS) {
    const readings: Reading[] = [
      { point: 'leaving-water', atMs: atMs - 20_000, value: 3 },
      { point: 'chiller-power', atMs: atMs - 10_000, value: 0 },
      { point: 'pump-power', atMs: atMs - 10_000, value: 0 },
    ];
    store.addReadings(readings);
    estimator.advance(atMs, readings, null);
  }
}

/** All but the time. */
const figures = ({ iceOnHandKwh, lowKwh, highKwh, heatLeakWPerK }: IceEstimate): number[] => [
  iceOnHandKwh,
  lowKwh,
  highKwh,
  heatLeakWPerK,
];

describe('what the owner tells of the bank', () => {
  const config = juniper();
  const toldMs = START_MS + 2 * HOUR_MS;
  const endMs = toldMs + 20 * MINUTE_MS;
  let folder: string;
  let store: Store;
  let estimator: Estimator;
  const tellings = new Tellings(null);
  const begin = { atMs: START_MS, memory: null };

  beforeAll(() => {
    folder = mkdtempSync(join(tmpdir(), 'rimehold-telling-'));
    store = openStore(join(folder, 'told.db'), { siteId: 'juniper' });
    estimator = createEstimator(config, { seed: SEED, startMs: START_MS });
    restUntil(store, estimator, START_MS, toldMs);
  });
  afterAll(() => {
    store.close();
    rmSync(folder, { recursive: true, force: true });
  });

  it('is taken at once, with the ice before and after', () => {
    const before = estimator.estimate();
    const telling = tellings.tell(estimator, 'full', null, toldMs);
    const after = estimator.estimate();
    expect(telling.beforeKwh).toBe(before.iceOnHandKwh);
    expect(telling.afterKwh).toBe(after.iceOnHandKwh);
    expect(after.inventoryPct).toBeGreaterThan(95);
    expect(after.highKwh - after.lowKwh).toBeLessThan(before.highKwh - before.lowKwh);
    restUntil(store, estimator, toldMs, endMs);
  });

  it('is lived through again in its place by a restart or a late reading', () => {
    const told = new Tellings(tellings.memory()).between(START_MS, endMs);
    const again = replay(config, store, begin, endMs, SEED, told);
    expect(figures(again.estimator.estimate())).toEqual(figures(estimator.estimate()));
    const untold = replay(config, store, begin, endMs, SEED, []);
    expect(untold.estimator.estimate().inventoryPct).toBeLessThan(90);
  });

  it('is not told again by a checkpoint that knows it', () => {
    const after = createEstimator(config, { seed: SEED, startMs: toldMs, memory: estimator.memory() });
    const from = { atMs: endMs, memory: after.memory() };
    const told = tellings.between(START_MS, endMs);
    const again = replay(config, store, from, endMs + MINUTE_MS, SEED, told);
    expect(again.estimator.estimate().inventoryPct).toBeCloseTo(estimator.estimate().inventoryPct, 0);
  });

  it('taken back leaves the estimate as if it had never been told, after a restart too', () => {
    const restarted = new Tellings(tellings.memory());
    expect(restarted.open(endMs)?.what).toBe('full');
    const before = restarted.takeBack(endMs);
    const back = replay(config, store, before, endMs, SEED, restarted.between(before.atMs, endMs));
    const never = createEstimator(config, { seed: SEED, startMs: START_MS });
    for (let atMs = START_MS + MINUTE_MS; atMs <= endMs; atMs += MINUTE_MS)
      never.advance(atMs, store.readingsBetween(atMs - MINUTE_MS, atMs), null);
    const [a, b] = [figures(back.estimator.estimate()), figures(never.estimate())];
    for (const [i, value] of a.entries()) expect(value).toBeCloseTo(b[i], 9);
    expect(restarted.open(endMs)).toBeNull();
    expect(restarted.all(START_MS, endMs)).toMatchObject([{ what: 'full', takenBackMs: endMs }]);
    expect(() => restarted.takeBack(endMs)).toThrow(/nothing to take back/);
  });

  it('can be taken back for an hour', () => {
    expect(tellings.open(toldMs + HOUR_MS - 1)).not.toBeNull();
    expect(tellings.open(toldMs + HOUR_MS)).toBeNull();
  });

  it('names only a temperature probe as moved', () => {
    const fresh = new Tellings(null);
    expect(() => fresh.tell(estimator, 'probe-moved', 'chiller-power', endMs)).toThrow(/temperature probe/);
    expect(() => fresh.tell(estimator, 'empty', 'leaving-water', endMs)).toThrow(/probe-moved/);
    expect(fresh.tell(estimator, 'probe-moved', 'leaving-water', endMs).point).toBe('leaving-water');
  });

  it('begins anew from a damaged memory', () => {
    expect(new Tellings('{"list": [{"what": "melted"}]').all(0, endMs)).toEqual([]);
  });
});
