import { describe, expect, it } from 'vitest';
import { HOUR_MS, MINUTE_MS } from '../../src/time.ts';
import { stripData, withRecord, type StripData } from '../../src/web/page/strip-data.ts';
import { ticks } from '../../src/web/page/strip-geometry.ts';
import { readStrip } from '../../src/web/page/strip-read.ts';
import { EVENING, NOW_MS, planAt, recordsBetween } from './juniper-evening.ts';

const every5 = recordsBetween(EVENING.startMs, NOW_MS).filter(({ atMs }) => (atMs / MINUTE_MS) % 5 === 4);
const span = { startMs: EVENING.startMs, endMs: EVENING.endMs, nowMs: NOW_MS };
const hour = (h: number): number => EVENING.startMs + h * HOUR_MS;

describe('the strip of a night', () => {
  const data: StripData = stripData(span, every5, planAt(NOW_MS), planAt(EVENING.startMs, -1.6));

  it('draws the past from records and the rest from the plan, joined at the pen', () => {
    const pen = every5.at(-1);
    expect(data.ice).toHaveLength(1);
    expect(data.ice[0]).toHaveLength(every5.length);
    expect(data.iceAhead[0]).toEqual({ atMs: pen?.atMs, value: pen?.iceOnHandKwh });
    expect(data.iceAhead.every(({ atMs }) => atMs <= EVENING.endMs)).toBe(true);
    expect(data.iceAhead.slice(1).every(({ atMs }) => atMs > (pen?.atMs ?? 0))).toBe(true);
    expect(data.gaps).toEqual([]);
  });

  it('steps the price by the tariff of the day, without holes or overlaps', () => {
    const steps = [...data.price.past, ...data.price.ahead];
    expect(steps.map(({ value }) => value)).toEqual([0.28, 0.17, 0.28, 0.28, 0.17, 0.11, 0.17, 0.28]);
    expect(steps.slice(4).map(({ fromMs }) => (fromMs - EVENING.startMs) / HOUR_MS)).toEqual([
      10, 12, 20, 22,
    ]);
    expect(steps.at(-1)?.toMs).toBe(EVENING.endMs);
    for (const [i, step] of steps.slice(1).entries()) {
      expect(Math.abs(step.fromMs - steps[i].toMs)).toBeLessThanOrEqual(5 * MINUTE_MS);
    }
  });

  it('shows what ran and what shall run', () => {
    expect(data.runs.past.map(({ value }) => value)).toEqual([
      'idle',
      'charging',
      'idle',
      'charging',
      'charging-while-discharging',
      'discharging',
    ]);
    expect(data.runs.ahead.map(({ value }) => value)).toEqual(['discharging', 'idle', 'charging', 'idle']);
  });

  it('names a stretch without records and does not draw across it', () => {
    const holed = every5.filter(({ atMs }) => atMs < hour(3) || atMs > hour(4.5));
    const { gaps, ice } = stripData(span, holed, null, null);
    expect(gaps).toHaveLength(1);
    expect((gaps[0].toMs - gaps[0].fromMs) / HOUR_MS).toBeCloseTo(1.6, 1);
    expect(ice).toHaveLength(2);
    const late = stripData(
      span,
      every5.filter(({ atMs }) => atMs > hour(6)),
      null,
      null,
    );
    expect(late.gaps[0].fromMs).toBe(EVENING.startMs);
    expect(stripData(span, [], null, null).gaps).toEqual([]);
  });

  it('breaks only the line of a point that was not heard', () => {
    const deaf = every5.map((record) =>
      record.atMs > hour(5) && record.atMs < hour(6) ? { ...record, roomC: null } : record,
    );
    const { room, ice, gaps } = stripData(span, deaf, null, null);
    expect([room.length, ice.length, gaps.length]).toEqual([2, 1, 0]);
  });

  it('reads past, present and future, and says nothing where nothing is known', () => {
    const past = readStrip(data, hour(4));
    expect([past.ahead, past.mode, past.limitC]).toEqual([false, 'charging', 26]);
    expect(past.iceKwh).toBeCloseTo(7.85, 1);
    expect(past.thoughtIceKwh).not.toBeNull();
    expect(readStrip(data, NOW_MS).mode).toBe('discharging');
    const ahead = readStrip(data, hour(16));
    expect([ahead.ahead, ahead.mode, ahead.roomC, ahead.price]).toEqual([true, 'charging', null, 0.11]);
    const empty = readStrip(stripData(span, [], null, null), hour(4));
    expect(Object.values(empty).filter((value) => value !== null)).toEqual([hour(4), false]);
  });

  it('takes new records one to five minutes, and none twice', () => {
    const base = recordsBetween(NOW_MS, NOW_MS + 12 * MINUTE_MS);
    const grown = base.reduce((list, record) => withRecord(list, record), withRecord([], base[0]));
    expect(grown.map(({ atMs }) => (atMs - NOW_MS) / MINUTE_MS)).toEqual([4, 9, 12]);
  });

  it('chooses round ticks', () => {
    expect(ticks(17, 36, 5)).toEqual([20, 25, 30, 35]);
    expect(ticks(0, 16.7, 5)).toEqual([0, 5, 10, 15]);
    expect(ticks(0, 57, 5)).toEqual([0, 20, 40]);
  });
});
