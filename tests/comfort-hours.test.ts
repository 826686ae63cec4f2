import { describe, expect, it } from 'vitest';
import { expectedHome, limitAt } from '../src/comfort-hours.ts';
import type { CabinConfig, ComfortConfig } from '../src/config.ts';
import { fromWall, withinClock } from '../src/time.ts';

const ZONE = 'Europe/Madrid';
const comfort = {
  limitC: 26,
  sleepingLimitC: 24,
  sleepingFrom: '23:00',
  sleepingTo: '07:00',
} as ComfortConfig;
const at = (day: number, hour: number, minute = 0): number =>
  fromWall(ZONE, 2026, 7, day, hour * 60 + minute);

describe('comfort limit', () => {
  it.each([
    [22, 59, 26],
    [23, 0, 24],
    [3, 0, 24],
    [6, 59, 24],
    [7, 0, 26],
  ])('at %d:%d is %d', (hour, minute, limitC) => {
    expect(limitAt(comfort, ZONE, at(14, hour, minute))).toBe(limitC);
  });

  it('is one limit where no sleeping limit is given', () => {
    expect(limitAt({ ...comfort, sleepingLimitC: null }, ZONE, at(14, 3))).toBe(26);
  });
});

describe('home hours', () => {
  // 2026-07-17 is a Friday
  const cabin = { home: [{ days: ['FR'], from: '18:00', to: '09:00' }] } as unknown as CabinConfig;

  it.each([
    ['Friday evening', at(17, 19), true],
    ['before they come', at(17, 17), false],
    ['the Saturday morning after', at(18, 8), true],
    ['Saturday evening, which begins on a Saturday', at(18, 19), false],
    ['the Friday morning before', at(17, 8), false],
  ])('%s', (_name, ms, home) => {
    expect(expectedHome(cabin, ZONE, ms)).toBe(home);
  });
});

it('a range whose ends are equal is the whole day', () => {
  expect([0, 719, 1439].map((minute) => withinClock(minute, '00:00', '00:00'))).toEqual([true, true, true]);
});
