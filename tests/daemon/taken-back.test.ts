/** What was told of the bank and taken back leaves no trace in the records, nor in the sheet made from them. */
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { Daemon } from '../../src/daemon/daemon.ts';
import { sheetFor, storedSheet } from '../../src/daemon/nights.ts';
import { Actuators } from '../../src/mqtt/actuators.ts';
import { HomieDevice } from '../../src/mqtt/homie-device.ts';
import { Intake } from '../../src/mqtt/intake.ts';
import type { Publisher } from '../../src/mqtt/link.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import { openStore, type Store } from '../../src/store/store.ts';
import { MINUTE_MS, nightOf } from '../../src/time.ts';

const NIGHT = nightOf('Europe/Madrid', '2026-07-14');
/** Told ten minutes before the night is closed, so that one part of the test can take it back after that. */
const START_MS = NIGHT.endMs - 40 * MINUTE_MS;
const TOLD_MS = NIGHT.endMs - 10 * MINUTE_MS;

const quiet = { info: () => undefined, warn: () => undefined, error: () => undefined };
const nowhere: Publisher = {
  publish: () => Promise.resolve(true),
  subscribe: () => Promise.resolve([]),
  unsubscribe: () => Promise.resolve(),
};

function daemonOn(store: Store, nowMs: () => number): Daemon {
  const parsed = parseSiteFile(readFileSync(join(import.meta.dirname, '../../config/juniper.yaml'), 'utf8'));
  if (!parsed.ok) throw new Error('config/juniper.yaml has faults');
  const { config } = parsed;
  const never = (): (() => void) => () => undefined;
  return new Daemon({
    config,
    clock: { nowMs, every: never, after: never },
    clockRate: 1,
    notBeforeMs: 0,
    seed: 1,
    store,
    intake: new Intake(config.points),
    actuators: new Actuators(config),
    publisher: nowhere,
    device: new HomieDevice({
      config,
      publisher: nowhere,
      settings: { strategy: 'planned', wish: 'none', wishForMs: 7_200_000, limitC: 26, told: null },
      nowMs,
      onSet: () => null,
      onRefused: () => undefined,
    }),
    log: quiet,
    stopwatch: () => 0,
  });
}

describe('a telling that is taken back', () => {
  const folder = mkdtempSync(join(tmpdir(), 'rimehold-taken-back-'));
  let store: Store;
  let daemon: Daemon;
  let nowMs = START_MS;

  const liveTo = (toMs: number): void => {
    for (; nowMs < toMs; nowMs += MINUTE_MS) daemon.cycle();
  };
  const iceBetween = (fromMs: number, toMs: number): number[] =>
    store.recordsBetween(fromMs, toMs).map(({ iceOnHandKwh }) => iceOnHandKwh);

  beforeAll(() => {
    store = openStore(join(folder, 'told.db'), { siteId: 'juniper' });
    daemon = daemonOn(store, () => nowMs);
    daemon.start();
    liveTo(TOLD_MS);
  });
  afterAll(() => {
    store.close();
    rmSync(folder, { recursive: true, force: true });
  });

  it('is in the records while it stands, and in no record and no sheet afterwards', () => {
    const before = iceBetween(START_MS, TOLD_MS - 1).at(-1) ?? Number.NaN;
    daemon.tell('empty', null);
    liveTo(NIGHT.endMs + 5 * MINUTE_MS);
    expect(Math.max(...iceBetween(TOLD_MS - 1, nowMs))).toBeLessThan(before / 4);
    const first = storedSheet(store, NIGHT.date);
    expect(first?.ice.lowestKwh).toBeLessThan(before / 4);
    expect(first?.revision).toBe(1);

    daemon.takeBack();
    for (const kwh of iceBetween(TOLD_MS - 1, nowMs)) expect(Math.abs(kwh - before)).toBeLessThan(0.5);
    const second = storedSheet(store, NIGHT.date);
    expect(second?.revision).toBe(2);
    expect(second?.revisedBecause).toBe('what was told of the bank was taken back');
    expect(second?.ice.lowestKwh).toBeGreaterThan(before - 0.5);
    expect(second?.told).toMatchObject([{ what: 'empty' }]);
    expect(second?.told?.[0].takenBack).not.toBeNull();
    expect(storedSheet(store, NIGHT.date, 1)).toEqual(first);
  });

  it('is in no sheet of a night that still goes on', () => {
    const toldMs = nowMs;
    const before = store.latestRecord()?.iceOnHandKwh ?? Number.NaN;
    daemon.tell('empty', null);
    liveTo(toldMs + 5 * MINUTE_MS);
    daemon.takeBack();
    const parsed = daemon.view().config;
    const sheet = sheetFor(parsed, store, nightOf('Europe/Madrid', '2026-07-15').date, nowMs);
    expect(sheet?.ice.lowestKwh).toBeGreaterThan(before - 0.5);
  });
});
