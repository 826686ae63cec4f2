import Database from 'better-sqlite3';
import * as fc from 'fast-check';
import { readFileSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { RimeholdError } from '../../src/errors.ts';
import type { PointId, Reading } from '../../src/points.ts';
import { openStore } from '../../src/store/store.ts';
import { asStored } from '../../src/store/record-codec.ts';
import { DAY_MS, nightOf } from '../../src/time.ts';
import { baseRecord, tellNight, tellPlan } from '../reports/night-story.ts';
import { opened, scratchFile, scratchFolder } from './scratch.ts';

const T0 = Date.UTC(2026, 6, 14, 10);

function fault(work: () => unknown): RimeholdError {
  try {
    work();
  } catch (error) {
    if (error instanceof RimeholdError) return error;
    throw error;
  }
  throw new Error('expected a RimeholdError');
}

describe('readings', () => {
  it('come back in order of time whatever order they came in, the last value of a point and time winning', () => {
    const points: PointId[] = ['leaving-water', 'chiller-power', 'room-temperature/loft'];
    const reading = fc.record({
      point: fc.constantFrom(...points),
      atMs: fc.integer({ min: 0, max: 40 }).map((step) => T0 + step * 1000),
      value: fc.double({ noNaN: true, noDefaultInfinity: true }),
    });
    fc.assert(
      fc.property(fc.array(fc.array(reading, { maxLength: 20 }), { maxLength: 5 }), (batches) => {
        const store = openStore(join(scratchFolder(), 'a.db'), { siteId: 'juniper' });
        const truth = new Map<string, Reading>();
        for (const batch of batches) {
          store.addReadings(batch);
          for (const one of batch) truth.set(`${one.atMs} ${one.point}`, one);
          if (batch.length % 2 === 0) store.flush();
        }
        const expected = [...truth.values()].filter((one) => one.atMs > T0 + 3000 && one.atMs <= T0 + 30_000);
        const found = store.readingsBetween(T0 + 3000, T0 + 30_000);
        store.close();
        expect(found.toSorted(byTimeAndPoint)).toEqual(expected.toSorted(byTimeAndPoint));
        expect(found.map((one) => one.atMs)).toEqual(found.map((one) => one.atMs).toSorted((a, b) => a - b));
      }),
      { numRuns: 10 },
    );
  });

  it('are found by point, flushed or not', () => {
    const store = opened(scratchFile());
    store.addReadings([
      { point: 'leaving-water', atMs: T0, value: 4.5 },
      { point: 'room-humidity', atMs: T0, value: 50 },
    ]);
    store.flush();
    store.addReadings([
      { point: 'leaving-water', atMs: T0 + 1, value: 4.4375 },
      { point: 'occupied', atMs: T0 + 1, value: 1 },
    ]);
    expect(store.readingsBetween(T0 - 1, T0 + 1, ['leaving-water']).map((one) => one.value)).toEqual([
      4.5, 4.4375,
    ]);
    expect(store.readingsBetween(T0 - 1, T0 + 1, ['bank-top'])).toEqual([]);
    expect(store.readingsBetween(T0 - 1, T0 + 1)).toHaveLength(4);
  });
});

function byTimeAndPoint(a: Reading, b: Reading): number {
  return a.atMs - b.atMs || a.point.localeCompare(b.point);
}

describe('records, plans, memories, sheets', () => {
  it('survive closing and opening', () => {
    const file = scratchFile();
    const records = tellNight({
      zone: 'Europe/Madrid',
      night: nightOf('Europe/Madrid', '2026-07-14'),
      stepMs: 600_000,
    });
    const plan = tellPlan('Europe/Madrid', T0);
    const first = opened(file);
    const kept = records.map((record) => first.addRecord(record));
    const keptPlan = first.addPlan(plan);
    first.saveMemory('estimator', '{"a":1}');
    first.saveMemory('estimator', '{"a":2}');
    expect(first.loadMemory('estimator')).toBe('{"a":2}');
    expect(first.recordsBetween(0, Infinity)).toEqual(kept);
    expect(first.latestPlan()).toEqual(keptPlan);
    expect(first.close().fault).toBeNull();

    const second = opened(file);
    expect(second.recordsBetween(0, Infinity)).toEqual(kept);
    expect(second.recordsBetween(kept[3].atMs, kept[5].atMs)).toEqual(kept.slice(4, 6));
    expect(second.latestRecord()).toEqual(kept.at(-1));
    expect(second.latestPlan()).toEqual(keptPlan);
    expect(second.plansBetween(0, T0)).toEqual([keptPlan]);
    expect(second.loadMemory('estimator')).toBe('{"a":2}');
    expect(second.loadMemory('forecaster')).toBeNull();
  });

  it('keep every revision of a sheet', () => {
    const store = opened(scratchFile());
    expect(store.addSheet('2026-07-14', '{"n":1}')).toBe(1);
    expect(store.addSheet('2026-07-15', '{"n":7}')).toBe(1);
    expect(store.addSheet('2026-07-14', '{"n":2}')).toBe(2);
    expect(store.sheet('2026-07-14')).toEqual({ date: '2026-07-14', revision: 2, body: '{"n":2}' });
    expect(store.sheet('2026-07-14', 1)?.body).toBe('{"n":1}');
    expect(store.sheet('2026-07-14', 3)).toBeNull();
    expect(store.sheets().map((sheet) => [sheet.date, sheet.revision])).toEqual([
      ['2026-07-14', 2],
      ['2026-07-15', 1],
    ]);
    expect(store.sheets('2026-07-15', '2026-07-31').map((sheet) => sheet.body)).toEqual(['{"n":7}']);
  });

  it('read fields that an older database does not have as absent, and add their columns', () => {
    const file = scratchFile();
    const record = baseRecord(T0, 30_000);
    const store = openStore(file, { siteId: 'juniper' });
    store.addRecord(record);
    store.close();
    const raw = new Database(file);
    raw.exec('ALTER TABLE cycles DROP COLUMN feelsLikeC; ALTER TABLE cycles DROP COLUMN wish');
    raw.close();
    const again = opened(file);
    expect(again.recordsBetween(0, T0)).toEqual([{ ...asStored(record), feelsLikeC: null, wish: '' }]);
  });
});

describe('one writer', () => {
  it('refuses a second writer in one sentence and lets readers in', () => {
    const file = scratchFile();
    const writer = opened(file);
    writer.addReadings([{ point: 'leaving-water', atMs: T0, value: 1 }]);
    writer.flush();
    const refusal = fault(() => openStore(file, { siteId: 'juniper' }));
    expect(refusal.code).toBe('store-busy');
    expect(refusal.message).toContain(String(process.pid));
    const reader = opened(file, { readOnly: true });
    expect(reader.readingsBetween(0, T0)).toHaveLength(1);
    writer.addReadings([{ point: 'leaving-water', atMs: T0 + 1, value: 2 }]);
    expect(writer.flush().fault).toBeNull();
    expect(reader.readingsBetween(0, T0 + 1)).toHaveLength(2);
    writer.close();
    opened(file).close();
  });

  it('keeps a reader from writing', () => {
    const file = scratchFile();
    opened(file).close();
    const reader = opened(file, { readOnly: true });
    expect(() => reader.addSheet('2026-07-14', '{}')).toThrow(RimeholdError);
    expect(reader.verify()).toEqual([]);
  });
});

describe('files that cannot be used', () => {
  it('names a database of a newer rimehold and leaves it alone', () => {
    const file = scratchFile();
    opened(file).close();
    const raw = new Database(file);
    raw.pragma('user_version = 99');
    raw.close();
    expect(fault(() => openStore(file, { siteId: 'juniper' })).code).toBe('store-newer');
    expect(fault(() => openStore(file, { siteId: 'juniper', readOnly: true })).code).toBe('store-newer');
  });

  it('names what is no database, another program’s database and a torn one', () => {
    const text = scratchFile();
    writeFileSync(text, 'time,point,value\n'.repeat(500));
    expect(fault(() => openStore(text, { siteId: 'juniper' })).code).toBe('store-broken');
    expect(readFileSync(text, 'utf8').startsWith('time,point')).toBe(true);

    const foreign = scratchFile();
    const raw = new Database(foreign);
    raw.exec('CREATE TABLE theirs (a)');
    raw.close();
    expect(fault(() => openStore(foreign, { siteId: 'juniper' })).code).toBe('store-broken');

    const torn = scratchFile();
    const store = opened(torn);
    store.addReadings(
      Array.from({ length: 4000 }, (_, i) => ({ point: 'leaving-water' as const, atMs: T0 + i, value: i })),
    );
    store.close();
    const bytes = readFileSync(torn);
    bytes.fill(0x5a, 4096);
    writeFileSync(torn, bytes);
    expect(fault(() => openStore(torn, { siteId: 'juniper' })).code).toBe('store-broken');
  });

  it('names a missing folder, a missing file for a reader and another site', () => {
    const folder = scratchFolder();
    expect(fault(() => openStore(join(folder, 'none', 'a.db'), { siteId: 'juniper' })).code).toBe(
      'file-unreadable',
    );
    expect(fault(() => openStore(join(folder, 'a.db'), { siteId: 'juniper', readOnly: true })).code).toBe(
      'file-unreadable',
    );
    opened(join(folder, 'b.db')).close();
    expect(fault(() => openStore(join(folder, 'b.db'), { siteId: 'saltmarsh' }))).toMatchObject({
      code: 'config',
    });
    opened(join(folder, 'b.db'));
  });
});

function wholeSeconds(fromMs: number, count: number): Reading[] {
  return Array.from({ length: count }, (_, i) => ({
    point: 'leaving-water',
    atMs: fromMs + i * 1000,
    value: i / 16,
  }));
}

describe('a full disk', () => {
  it('keeps what could not be written, goes on, and writes it when there is room', () => {
    const file = scratchFile();
    const store = opened(file, { mostPages: 120, keepRawMs: DAY_MS });
    const old = wholeSeconds(T0 - 3 * DAY_MS, 12_000);
    store.addReadings(old);
    expect(store.flush().fault).toBeNull();

    const fresh = wholeSeconds(T0, 9000);
    store.addRecord(baseRecord(T0, 30_000));
    store.addReadings(fresh);
    expect(store.flush().fault?.code).toBe('store-full');
    store.addRecord({ ...baseRecord(T0 + 30_000, 30_000), reason: 'A word that was never written before.' });
    expect(store.health().lostReadings).toBe(0);
    expect(store.recordsBetween(0, T0 + 30_000)).toHaveLength(2);
    expect(store.readingsBetween(T0 - 1, T0 + 1e9)).toEqual(fresh);
    expect(fault(() => store.addSheet('2026-07-14', 'x'.repeat(400_000))).code).toBe('store-full');

    while (!store.compact(T0).done);
    expect(store.flush().fault).toBeNull();
    expect(store.health()).toMatchObject({
      waitingReadings: 0,
      waitingRecords: 0,
      lostReadings: 0,
      fault: null,
    });
    store.close();
    const again = opened(file);
    expect(again.readingsBetween(T0 - 1, T0 + 1e9)).toEqual(fresh);
    expect(again.recordsBetween(0, T0 + 30_000).at(-1)?.reason).toBe('A word that was never written before.');
  });

  it('drops the oldest beyond its bound, and counts them', () => {
    const store = opened(scratchFile(), { mostPages: 30, mostWaiting: 5000 });
    const many = Array.from({ length: 12_000 }, (_, i) => ({
      point: 'pump-power' as const,
      atMs: T0 + i,
      value: i,
    }));
    store.addReadings(many);
    store.flush();
    expect(store.health()).toMatchObject({ waitingReadings: 5000, lostReadings: 7000 });
    expect(store.readingsBetween(0, T0 + 1e9)[0].value).toBe(7000);
  });
});

describe('backup', () => {
  it('is a whole database while the writer goes on, taken by writer or reader', () => {
    const folder = scratchFolder();
    const file = join(folder, 'a.db');
    const store = opened(file);
    store.addReadings([{ point: 'leaving-water', atMs: T0, value: 3.0625 }]);
    store.flush();
    store.backup(join(folder, 'copy.db'));
    const reader = opened(file, { readOnly: true });
    reader.backup(join(folder, 'copy2.db'));
    store.addReadings([{ point: 'leaving-water', atMs: T0 + 1, value: 3 }]);
    store.flush();
    for (const name of ['copy.db', 'copy2.db']) {
      const copy = opened(join(folder, name));
      expect(copy.readingsBetween(0, T0 + 1)).toEqual([{ point: 'leaving-water', atMs: T0, value: 3.0625 }]);
      expect(copy.verify()).toEqual([]);
    }
    expect(fault(() => store.backup(join(folder, 'copy.db'))).code).toBe('usage');
  });
});

describe('size', () => {
  it('keeps a day of records at 30 s within 600 KB', () => {
    const file = scratchFile();
    const store = opened(file);
    const records = tellNight({ zone: 'Europe/Madrid', night: nightOf('Europe/Madrid', '2026-07-14') });
    const before = store.health().bytes;
    for (const [index, record] of records.entries()) {
      store.addRecord(record);
      if (index % 10 === 0) store.flush();
    }
    store.close();
    const bytesPerDay = statSync(file).size - before;
    console.log(
      `records at 30 s: ${bytesPerDay} bytes a day, ${(bytesPerDay / records.length).toFixed(0)} each`,
    );
    expect(records).toHaveLength(2880);
    expect(bytesPerDay).toBeLessThan(600_000);
  });
});
