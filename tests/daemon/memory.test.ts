import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { Memory } from '../../src/daemon/memory.ts';
import type { Log } from '../../src/daemon/ports.ts';
import { createEstimator } from '../../src/estimation/estimator.ts';
import { openStore, type Store } from '../../src/store/store.ts';
import { HOUR_MS, MINUTE_MS } from '../../src/time.ts';
import { siteOf } from '../plant/site.ts';

const NOW = Date.UTC(2026, 6, 1, 12);
const log = { info: () => undefined, warn: () => undefined, error: () => undefined } as unknown as Log;

let folder: string;
let store: Store;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'rimehold-memory-'));
  store = openStore(join(folder, 'memory.db'), { siteId: 'juniper' });
});
afterEach(() => {
  store.close();
  rmSync(folder, { recursive: true });
});

describe('what was learned', () => {
  it('holds when the clock is behind it', () => {
    const site = siteOf();
    const full = createEstimator(site, { seed: 1, startMs: NOW });
    full.anchor('full');
    const memory = new Memory(store, log);
    memory.save('estimator', { atMs: NOW, memory: full.memory() });

    const behindMs = NOW - HOUR_MS;
    const kept = memory.checkpoint(behindMs);
    expect(kept?.atMs).toBe(behindMs);
    const again = createEstimator(site, { seed: 1, startMs: behindMs, memory: kept?.memory });
    again.advance(behindMs + MINUTE_MS, [], null);
    expect(again.estimate().iceOnHandKwh).toBeCloseTo(full.estimate().iceOnHandKwh, 0);
  });

  it('is on the medium at once where a crash must not lose it', () => {
    const memory = new Memory(store, log);
    memory.saveNow('dispatch', { trippedUntilMs: NOW });
    const other = openStore(join(folder, 'memory.db'), { siteId: 'juniper', readOnly: true });
    expect(JSON.parse(other.loadMemory('dispatch') ?? 'null')).toEqual({ trippedUntilMs: NOW });
    other.close();
  });
});
