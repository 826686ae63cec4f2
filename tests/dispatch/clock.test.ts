import { describe, expect, it } from 'vitest';
import { judgeClock, NOT_BEFORE_MS, type ClockSigns } from '../../src/dispatch/clock.ts';

const NOW = Date.UTC(2026, 6, 14);
const calm: ClockSigns = {
  nowMs: NOW,
  notBeforeMs: NOT_BEFORE_MS,
  lastRecordMs: NOW - 30_000,
  sensorsAheadMs: null,
};

describe('clock', () => {
  it.each<[string, Partial<ClockSigns>, string]>([
    ['in good order', {}, 'set'],
    ['without any record', { lastRecordMs: null }, 'set'],
    ['in 1970', { nowMs: 60_000, lastRecordMs: null }, 'doubtful'],
    ['not a number', { nowMs: Number.NaN }, 'doubtful'],
    ['a little set back', { lastRecordMs: NOW + 5 * 60_000 }, 'set'],
    ['behind the store', { lastRecordMs: NOW + 3_600_000 }, 'doubtful'],
    ['a little behind its sensors', { sensorsAheadMs: 90_000 }, 'set'],
    ['hours behind its sensors', { sensorsAheadMs: 7_200_000 }, 'doubtful'],
  ])('%s', (_name, signs, state) => {
    const verdict = judgeClock({ ...calm, ...signs });
    expect(verdict.state).toBe(state);
    expect(verdict.why === '').toBe(state === 'set');
  });
});
