import { describe, expect, it } from 'vitest';
import { HighWater } from '../../src/daemon/high-water.ts';
import { Past } from '../../src/daemon/rewind.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS } from '../../src/time.ts';

const NOW = Date.UTC(2026, 6, 14, 18);

describe('high water', () => {
  it('stands while the clock is behind it, and is given up after a day', () => {
    const mark = new HighWater();
    expect(mark.at(NOW)).toBeNull();
    mark.seen(NOW);
    const back = NOW - 5 * HOUR_MS;
    for (let h = 0; h <= 4; h += 1) {
      mark.seen(back + h * HOUR_MS);
      expect(mark.at(back + h * HOUR_MS)).toBe(NOW);
    }
    const far = new HighWater();
    far.seen(NOW + 365 * DAY_MS);
    expect(far.at(NOW)).toBe(NOW + 365 * DAY_MS);
    expect(far.at(NOW + DAY_MS + 1)).toBe(NOW + DAY_MS + 1);
  });
});

describe('past', () => {
  const kept = (): Past => {
    const past = new Past();
    for (let atMs = NOW - 6 * HOUR_MS; atMs <= NOW; atMs += 10 * MINUTE_MS) past.keep(atMs, () => atMs);
    return past;
  };

  it('asks for nothing without a late reading, or for one from before every checkpoint', () => {
    const past = kept();
    expect(past.due(NOW)).toBeNull();
    past.late(NOW - 30 * HOUR_MS);
    expect(past.due(NOW)).toBeNull();
  });

  it('goes back to just before the earliest late reading that it can reach', () => {
    const past = kept();
    past.late(0);
    past.late(NOW - HOUR_MS);
    past.late(NOW - 2 * HOUR_MS - MINUTE_MS);
    const from = past.due(NOW);
    expect(from?.atMs).toBeLessThan(NOW - 2 * HOUR_MS - MINUTE_MS);
    expect(from?.atMs).toBeGreaterThanOrEqual(NOW - 3 * HOUR_MS);
  });

  it('does not go back for every late reading on its own', () => {
    const past = kept();
    past.late(NOW - HOUR_MS);
    expect(past.due(NOW)).not.toBeNull();
    past.late(NOW - HOUR_MS);
    expect(past.due(NOW + MINUTE_MS)).toBeNull();
    expect(past.due(NOW + 6 * MINUTE_MS)).not.toBeNull();
  });

  it('keeps the checkpoints of a replay, so that the next one is shorter', () => {
    const past = kept();
    past.late(NOW - 4 * HOUR_MS);
    const from = past.due(NOW);
    past.relived(from ?? { atMs: 0, memory: null }, [{ atMs: NOW - HOUR_MS, memory: 'relived' }]);
    past.late(NOW - MINUTE_MS);
    expect(past.due(NOW + HOUR_MS)?.memory).toBe('relived');
  });
});
