/** The trade's strategies as a table of situations; definitions beside `strategies.ts`. */
import { describe, expect, it } from 'vitest';
import type { PlanProblem } from '../../src/planning/problem.ts';
import {
  chillerPriority,
  offPeakSlots,
  simpleCommand,
  storagePriority,
} from '../../src/planning/strategies.ts';
import { fromWall } from '../../src/time.ts';
import { every, grid, problem, scenario } from './problems.ts';

const SLOTS = 144;
type Parts = Parameters<typeof problem>[1];

/** From a local hour on: 10 ct from 0 to 8, 30 ct else; a load of `loadW` from 18 to 24. */
function at(clock: number, parts: Parts = {}, loadW = 1000): PlanProblem {
  const hourOf = (t: number): number => (clock + t / 4) % 24;
  return problem(SLOTS, {
    nowMs: fromWall('Europe/Madrid', 2026, 7, 1, clock * 60),
    power: grid(SLOTS, (t) => (hourOf(t) < 8 ? 0.1 : 0.3)),
    scenarios: [scenario(SLOTS, { loadW: every(SLOTS, (t) => (hourOf(t) >= 18 ? loadW : 0)) })],
    ...parts,
  });
}

describe('simple strategies', () => {
  it.each<[string, PlanProblem, string, string]>([
    ['off peak, room in the bank', at(2, { iceKwh: 6 }), 'charge-now', 'charge-now'],
    ['off peak, bank full', at(2, { iceKwh: 12 }), 'hold', 'hold'],
    ['off peak, nearly full, machine off: not again yet', at(2, { iceKwh: 11.6 }), 'hold', 'hold'],
    [
      'off peak, nearly full, machine on: to the end',
      at(2, { iceKwh: 11.6, chillerOn: true }),
      'charge-now',
      'charge-now',
    ],
    ['on peak, no load yet, ice enough', at(12, { iceKwh: 7 }), 'hold', 'hold'],
    ['on peak, no load yet, ice too little for the peak', at(12, { iceKwh: 3 }), 'charge-now', 'hold'],
    ['on peak, load, ice enough', at(19, { iceKwh: 7 }), 'discharge', 'charge-and-discharge'],
    ['on peak, load, ice short', at(19, { iceKwh: 2 }), 'charge-and-discharge', 'charge-and-discharge'],
    [
      'on peak, no load, room at its limit',
      at(12, { iceKwh: 7, homeNow: true, roomC: 25.9 }),
      'discharge',
      'charge-and-discharge',
    ],
    ['same, nobody home', at(12, { iceKwh: 7, homeNow: false, roomC: 25.9 }), 'hold', 'hold'],
    [
      'load, but the plant cannot do both',
      at(19, { iceKwh: 2, chiller: { chargesWhileDischarging: false } }),
      'discharge',
      'discharge',
    ],
  ])('%s', (_, p, storage, chiller) => {
    expect(storagePriority(p)).toBe(storage);
    expect(chillerPriority(p)).toBe(chiller);
  });

  it('follows the timetable', () => {
    const lines = [
      { at: '0 17 * * *', command: 'discharge' },
      { at: '0 23 * * *', command: 'hold' },
    ] as const;
    expect(simpleCommand('timetable', at(18), lines)).toBe('discharge');
    expect(simpleCommand('timetable', at(23.5), lines)).toBe('hold');
    expect(simpleCommand('timetable', at(18), [])).toBe('hold');
    expect(simpleCommand('storage-priority', at(2, { iceKwh: 6 }), lines)).toBe('charge-now');
  });

  it('takes the cheapest third as off peak, the night where all hours cost the same, the sun on an island', () => {
    const three = offPeakSlots(at(12));
    expect(three.filter(Boolean)).toHaveLength(32 + 0);
    expect(three.findIndex(Boolean)).toBe(48);
    const flat = offPeakSlots(at(12, { power: grid(SLOTS, () => 0.2) }));
    expect(flat.findIndex(Boolean)).toBe(40);
    const island = offPeakSlots(
      at(0, {
        power: {
          kind: 'island',
          houseW: every(SLOTS, () => 150),
          battery: null,
          generator: null,
          inverterW: 3000,
        },
        scenarios: [scenario(SLOTS, { panelW: every(SLOTS, (t) => (t >= 36 && t < 60 ? 1500 : 0)) })],
      }),
    );
    expect(island[40]).toBe(true);
    expect(island.slice(36, 60).every(Boolean)).toBe(true);
  });
});
