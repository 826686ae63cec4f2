/** A late reading for a closed night makes a revision of its sheet; the first one stays as it was written. */
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { SiteConfig } from '../../src/config.ts';
import { NightBook } from '../../src/daemon/night-book.ts';
import { LateNights, nightsSince, readWaits } from '../../src/daemon/late-nights.ts';
import { reviseSheet, storedSheet, writeSheet } from '../../src/daemon/nights.ts';
import { relivedRecord, replay } from '../../src/daemon/rewind.ts';
import { Tellings } from '../../src/daemon/telling.ts';
import { createEstimator, type Estimator } from '../../src/estimation/estimator.ts';
import type { Reading } from '../../src/points.ts';
import type { NightSheet } from '../../src/reports/night-schema.ts';
import type { CycleRecord } from '../../src/record.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import { openStore, type Store } from '../../src/store/store.ts';
import { HOUR_MS, MINUTE_MS, nightOf } from '../../src/time.ts';
import { baseRecord } from '../reports/night-story.ts';

const NIGHT = nightOf('Europe/Madrid', '2026-07-14');
const [CHARGE_FROM, CHARGE_TO] = [NIGHT.endMs - 4 * HOUR_MS, NIGHT.endMs - 2 * HOUR_MS];
const CHECKPOINT_MS = NIGHT.endMs - 5 * HOUR_MS;
const SEED = 1;
const LATE_MS = NIGHT.endMs + HOUR_MS;

function juniper(): SiteConfig {
  const parsed = parseSiteFile(readFileSync(join(import.meta.dirname, '../../config/juniper.yaml'), 'utf8'));
  if (!parsed.ok) throw new Error('config/juniper.yaml has faults');
  return parsed.config;
}

/** What the plant said in a minute: it rests, and charges for two hours. */
function saidAt(atMs: number): Reading[] {
  const charging = atMs > CHARGE_FROM && atMs <= CHARGE_TO;
  return [
    { point: 'leaving-water', atMs: atMs - 20_000, value: 1.5 },
    { point: 'chiller-power', atMs: atMs - 10_000, value: charging ? 500 : 0 },
    { point: 'pump-power', atMs: atMs - 10_000, value: 0 },
    { point: 'outdoor-temperature', atMs: atMs - 10_000, value: 22 },
    { point: 'bank-surround', atMs: atMs - 10_000, value: 24 },
  ];
}

const isLate = ({ point, atMs }: Reading): boolean =>
  point === 'chiller-power' && atMs > CHARGE_FROM - MINUTE_MS && atMs <= CHARGE_TO + MINUTE_MS;

function recordAt(atMs: number, estimator: Estimator, chillerPowerW: number | null): CycleRecord {
  const record = { ...baseRecord(atMs, MINUTE_MS), chillerPowerW, pumpPowerW: 0, coolantSupplyC: null };
  const stale = chillerPowerW === null ? 'chiller-power' : '';
  return { ...relivedRecord(record, estimator.estimate()), pointsStale: stale };
}

describe('a late reading for a closed night', () => {
  const config = juniper();
  let folder: string;
  let store: Store;
  let inTime: Estimator;
  let late: LateNights;

  /** The last five hours of a night, without the machine's power while it charged. */
  beforeEach(() => {
    folder = mkdtempSync(join(tmpdir(), 'rimehold-revisions-'));
    store = openStore(join(folder, 'late.db'), { siteId: 'juniper' });
    late = new LateNights(config.site.zone);
    inTime = createEstimator(config, { seed: SEED, startMs: CHECKPOINT_MS });
    const estimator = createEstimator(config, { seed: SEED, startMs: CHECKPOINT_MS });
    for (let atMs = CHECKPOINT_MS + MINUTE_MS; atMs <= NIGHT.endMs; atMs += MINUTE_MS) {
      const said = saidAt(atMs);
      const heard = said.filter((reading) => !isLate(reading));
      store.addReadings(heard);
      estimator.advance(atMs, heard, 'hold');
      inTime.advance(atMs, said, 'hold');
      const power = heard.find((reading) => reading.point === 'chiller-power')?.value ?? null;
      store.addRecord(recordAt(atMs, estimator, power));
    }
    writeSheet(config, store, NIGHT, NIGHT.endMs, null, []);
  });
  afterEach(() => {
    store.close();
    rmSync(folder, { recursive: true, force: true });
  });

  function arrive(readings: readonly Reading[]): void {
    store.addReadings(readings);
    for (const reading of readings) late.heard(reading, LATE_MS);
  }

  function backlog(): Reading[] {
    const out: Reading[] = [];
    for (let atMs = CHECKPOINT_MS + MINUTE_MS; atMs <= NIGHT.endMs; atMs += MINUTE_MS)
      out.push(...saidAt(atMs).filter(isLate));
    return out;
  }

  function relive(): void {
    const relived: CycleRecord[] = [];
    const from = { atMs: CHECKPOINT_MS, memory: null };
    replay(config, store, from, NIGHT.endMs, SEED, [], (record, estimator) =>
      relived.push(relivedRecord(record, estimator.estimate())),
    );
    late.relived(relived);
  }

  it('makes a second sheet with what the readings change, and keeps the first', () => {
    const first = storedSheet(store, NIGHT.date);
    arrive(backlog());
    relive();
    expect(late.take(LATE_MS + MINUTE_MS)).toBeNull();
    const all = late.take(LATE_MS + 6 * MINUTE_MS);
    if (all === null) throw new Error('nothing came late');
    const second = reviseSheet(config, store, NIGHT, LATE_MS + 6 * MINUTE_MS, all, []);
    expect(second?.revision).toBe(2);
    expect(second?.revisedBecause).toMatch(/late readings of chiller-power/);
    expect(second?.electricity.machineKwh).toBeCloseTo(1, 1);
    expect(second?.ice.endKwh).not.toBeCloseTo(first?.ice.endKwh ?? Number.NaN, 1);
    expect(second?.ice.endKwh).toBeCloseTo(inTime.estimate().iceOnHandKwh, 1);
    expect(storedSheet(store, NIGHT.date)).toEqual(second);
    expect(storedSheet(store, NIGHT.date, 1)).toEqual(first);
    expect(first?.revisedBecause).toBe('');
    // the records stay as they were decided upon
    expect(store.recordsBetween(CHARGE_FROM, CHARGE_TO).every((one) => one.chillerPowerW === null)).toBe(
      true,
    );
    expect(late.take(LATE_MS + 20 * MINUTE_MS)).toBeNull();
  });

  it('is told by the book once, to the page and the broker, as the newest of the last night', () => {
    const published: unknown[] = [];
    const told: NightSheet[] = [];
    const said: string[] = [];
    const say = (_: object, sentence: string): void => void said.push(sentence);
    const book = new NightBook(
      {
        config,
        store,
        device: { publishNight: ({ sheet }) => void published.push(sheet) },
        log: { info: say, warn: say, error: say },
      },
      (sheet) => void told.push(sheet),
    );
    const tellings = new Tellings(null);
    const late = backlog();
    store.addReadings(late);
    for (const reading of late) book.late(reading, LATE_MS);
    book.revise(config, LATE_MS + MINUTE_MS, tellings);
    expect(told).toEqual([]);
    book.revise(config, LATE_MS + 6 * MINUTE_MS, tellings);
    book.revise(config, LATE_MS + 20 * MINUTE_MS, tellings);
    expect(told.map((sheet) => sheet.revision)).toEqual([2]);
    expect(published).toEqual(told);
    expect(said.join(' ')).toContain(
      `sheet of 2026-07-14 has a revision 2: ${late.length} late readings of chiller-power`,
    );
  });

  it('makes none when it changes nothing', () => {
    arrive([{ point: 'bank-surround', atMs: NIGHT.endMs - HOUR_MS + 1000, value: 24 }]);
    relive();
    const all = late.take(LATE_MS + 6 * MINUTE_MS);
    if (all === null) throw new Error('nothing came late');
    expect(reviseSheet(config, store, NIGHT, LATE_MS + 6 * MINUTE_MS, all, [])).toBeNull();
    expect(store.sheet(NIGHT.date)?.revision).toBe(1);
  });

  it('fills in what was heard where the estimate cannot live again', () => {
    const first = storedSheet(store, NIGHT.date);
    arrive(backlog());
    const all = late.take(LATE_MS + 6 * MINUTE_MS);
    if (all === null) throw new Error('nothing came late');
    const second = reviseSheet(config, store, NIGHT, LATE_MS + 6 * MINUTE_MS, all, []);
    expect(second?.electricity.machineKwh).toBeCloseTo(1, 1);
    expect(second?.ice).toEqual(first?.ice);
  });
});

describe('late readings', () => {
  const late = new LateNights('Europe/Madrid');

  it('is none of a night that still goes on, and waits for a sensor that never stops for an hour only', () => {
    late.heard({ point: 'leaving-water', atMs: NIGHT.endMs + MINUTE_MS, value: 1 }, LATE_MS);
    expect(late.take(LATE_MS + 10 * MINUTE_MS)).toBeNull();
    for (let minute = 0; minute <= 61; minute += 1)
      late.heard(
        { point: 'leaving-water', atMs: NIGHT.startMs + minute, value: 1 },
        LATE_MS + minute * MINUTE_MS,
      );
    expect(late.take(LATE_MS + 61 * MINUTE_MS)).toMatchObject({ count: 62, points: ['leaving-water'] });
  });

  it('asks for no revision when it claims to be older than two weeks', () => {
    const old = { point: 'leaving-water' as const, value: 1 };
    expect(late.heard({ ...old, atMs: Date.UTC(2020, 0, 2) }, LATE_MS)).toBe(false);
    expect(late.take(LATE_MS + 61 * MINUTE_MS)).toBeNull();
    expect(late.heard({ ...old, atMs: LATE_MS - 13 * 24 * HOUR_MS }, LATE_MS)).toBe(true);
  });

  it('waits on after a restart', () => {
    const waits = { fromMs: NIGHT.startMs, count: 3, points: ['leaving-water' as const] };
    const again = new LateNights('Europe/Madrid', readWaits(JSON.stringify(waits)));
    expect(again.take(LATE_MS)).toMatchObject(waits);
    expect(readWaits('{"fromMs":null}')).toBeNull();
    expect(readWaits('{')).toBeNull();
  });

  it('knows the nights from then to now', () => {
    const dates = nightsSince('Europe/Madrid', NIGHT.startMs + HOUR_MS, NIGHT.endMs + 25 * HOUR_MS);
    expect(dates.map((night) => night.date)).toEqual(['2026-07-14', '2026-07-15']);
  });
});
