/** The steps that are shown under a simple strategy are those of that strategy. */
import { describe, expect, it } from 'vitest';
import { charges, discharges } from '../../src/commands.ts';
import { followed } from '../../src/planning/followed.ts';
import { solvePlan, type Plan } from '../../src/planning/plan.ts';
import { simpleCommand } from '../../src/planning/strategies.ts';
import { fromWall, localClock } from '../../src/time.ts';
import { every, grid, plant, problem, scenario } from './problems.ts';

const SLOTS = 144;
const NOON = fromWall('Europe/Madrid', 2026, 7, 1, 12 * 60);
const clock = (t: number): number => (12 + t / 4) % 24;
/** Cheap from midnight to eight; a load from 18 to 23. */
const p = problem(SLOTS, {
  nowMs: NOON,
  iceKwh: 5,
  power: grid(SLOTS, (t) => (clock(t) < 8 ? 0.09 : 0.2)),
  plant: plant({ capacityKwh: 12, leakW: (ice) => 20 * Math.min(1, ice) }),
  scenarios: [0.8, 1.2].map((part) =>
    scenario(SLOTS, { loadW: every(SLOTS, (t) => (clock(t) >= 18 && clock(t) < 23 ? 800 * part : 0)) }),
  ),
});
const solved = solvePlan(p, {
  fallBack: (note) => {
    throw new Error(note);
  },
});
const timetable = [
  { at: '0 3 * * *', command: 'charge-now' as const },
  { at: '0 6 * * *', command: 'hold' as const },
  { at: '30 19 * * *', command: 'discharge' as const },
  { at: '0 23 * * *', command: 'hold' as const },
];
const hours = (plan: Plan, does: typeof charges): string[] => [
  ...new Set(
    plan.steps
      .filter((step) => does(step.command))
      .map((step) => localClock('Europe/Madrid', step.startMs).slice(0, 2)),
  ),
];

describe('a strategy that is followed', () => {
  it.each(['storage-priority', 'chiller-priority', 'timetable'] as const)(
    '%s begins with its own command',
    (name) => {
      const plan = followed(name, p, timetable, solved);
      expect(plan.strategy).toBe(name);
      expect(plan.command).toBe(simpleCommand(name, p, timetable));
      expect(plan.steps[0].command).toBe(plan.command);
      expect(plan.steps).toHaveLength(SLOTS);
      expect(plan.waitCostMoney).toBeNull();
    },
  );

  it('shows the hours of the timetable', () => {
    const plan = followed('timetable', p, timetable, solved);
    expect(hours(plan, charges)).toEqual(['03', '04', '05']);
    expect(hours(plan, discharges)).toEqual(['19', '20', '21', '22']);
    expect(localClock('Europe/Madrid', plan.nextChangeMs ?? 0)).toBe('19:30');
  });

  it('fills the bank off peak under storage priority, and shows the ice that this makes', () => {
    const plan = followed('storage-priority', p, timetable, solved);
    const at = (hour: number) => plan.steps[hour * 4];
    // 5 kWh last through the evening; eight cheap hours make 8 kWh again.
    expect(at(20).iceKwh).toBeGreaterThan(8);
    expect(at(10.75).iceKwh).toBeLessThan(2);
    // The two scenarios need 3.2 and 4.8 kWh: the band is what the weather makes of one and the same rule.
    expect(at(10.75).iceHighKwh).toBeGreaterThan(at(10.75).iceLowKwh + 0.5);
    expect(hours(plan, charges).every((hour) => Number(hour) < 8 || Number(hour) >= 18)).toBe(true);
  });

  it('runs the machine first under chiller priority, whatever the price', () => {
    const plan = followed('chiller-priority', p, timetable, solved);
    expect(hours(plan, charges)).toEqual(expect.arrayContaining(['18', '19', '20', '21', '22', '00']));
    expect(plan.expectedCostMoney).toBeGreaterThan(solved.expectedCostMoney ?? Infinity);
  });
});
