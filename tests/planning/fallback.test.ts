/** A plan must come whatever happens: bad input, a slow solve, a solve that throws. */
import { describe, expect, it } from 'vitest';
import { fallBack, shiftPlan, timetablePlan } from '../../src/planning/fallback.ts';
import { solvePlan, type Plan } from '../../src/planning/plan.ts';
import type { PlanProblem } from '../../src/planning/problem.ts';
import type { SolveOptions } from '../../src/planning/solve.ts';
import { fromWall } from '../../src/time.ts';
import { every, grid, HOUR_MS, plant, problem, scenario } from './problems.ts';

const NOW = fromWall('Europe/Madrid', 2026, 7, 1, 12 * 60);
const SLOTS = 96;
const p = problem(SLOTS, {
  nowMs: NOW,
  power: grid(SLOTS, (t) => (t > 48 && t < 80 ? 0.1 : 0.3)),
  scenarios: [scenario(SLOTS, { loadW: every(SLOTS, (t) => (t > 20 && t < 50 ? 800 : 0)) })],
});
const inputs = {
  nowMs: NOW,
  slotMs: p.slotMs,
  slots: SLOTS,
  zone: p.zone,
  timetable: [
    { at: '0 0 * * *', command: 'charge-now' },
    { at: '0 8 * * *', command: 'hold' },
    { at: '0 17 * * *', command: 'discharge' },
  ] as const,
  iceKwh: 2,
  iceLowKwh: 1,
  iceHighKwh: 3,
};
const planOr = (bad: PlanProblem, last: Plan | null, options: SolveOptions = {}): Plan =>
  solvePlan(bad, { ...options, fallBack: (note) => fallBack(last, { ...inputs, nowMs: bad.nowMs }, note) });
const good = planOr(p, null);

describe('fallback', () => {
  it('solves when it can', () => {
    expect(good.outcome).toBe('solved');
    expect(good.note).toBe('');
    expect(good.steps).toHaveLength(SLOTS);
  });

  it.each<[string, Partial<PlanProblem>, string]>([
    ['ice that is not a number', { iceKwh: Number.NaN }, 'the ice on hand is unknown'],
    ['no forecast', { scenarios: [] }, 'there is no forecast'],
    [
      'a forecast with a hole',
      { scenarios: [scenario(SLOTS, { outdoorC: every(SLOTS, (t) => (t === 7 ? Number.NaN : 25)) })] },
      'the forecast has holes',
    ],
    ['prices that end early', { power: grid(10, () => 0.2) }, 'prices do not reach'],
    ['no slots', { slots: 0 }, 'there are no slots'],
  ])('falls back on %s', (_, parts, sentence) => {
    const fallen = planOr({ ...p, ...parts, nowMs: NOW + HOUR_MS }, good);
    expect(fallen.outcome).toBe('shifted');
    expect(fallen.note).toContain(sentence);
    expect(planOr({ ...p, ...parts }, null).outcome).toBe('timetable');
  });

  it('falls back when the solve takes too long', () => {
    let ms = 0;
    const slow = planOr(p, good, { stopwatch: () => (ms += 10), limitMs: 100 });
    expect(slow.outcome).toBe('shifted');
    expect(slow.note).toBe('No fresh plan: the solve took too long. The last plan goes on.');
  });

  it('falls back when the plant model throws', () => {
    const broken = {
      ...plant(),
      operate: () => {
        throw new Error('no such map');
      },
    };
    const fallen = planOr({ ...p, plant: broken }, null);
    expect(fallen.outcome).toBe('timetable');
    expect(fallen.note).toContain('no such map');
  });

  it('falls back when figures of the plant are not finite', () => {
    const broken = { ...plant(), operate: () => ({ iceMakingW: Number.NaN, powerW: 500 }) };
    expect(planOr({ ...p, plant: broken }, good).outcome).toBe('shifted');
  });

  it('shifts a plan to the step of now', () => {
    const at = NOW + 13.1 * HOUR_MS;
    const shifted = shiftPlan(good, NOW + 11.9 * HOUR_MS, 'x') as Plan;
    expect(shifted.steps[0].startMs).toBeLessThanOrEqual(NOW + 11.9 * HOUR_MS);
    expect(shifted.steps[1].startMs).toBeGreaterThan(NOW + 11.9 * HOUR_MS);
    expect(shifted.command).toBe(shifted.steps[0].command);
    expect(shiftPlan(good, at, 'x')).toBeNull();
    expect(shiftPlan(good, NOW - HOUR_MS, 'x')).toBeNull();
    expect(shiftPlan(timetablePlan(inputs, ''), NOW + HOUR_MS, 'x')).toBeNull();
  });

  it('makes a plan of the timetable', () => {
    const plan = timetablePlan(inputs, 'No fresh plan.');
    expect(plan.command).toBe('hold');
    expect(plan.nextChangeMs).toBe(NOW + 5 * HOUR_MS);
    expect(plan.steps.filter((step) => step.command === 'discharge')).toHaveLength(7 * 4);
    expect(plan.steps.filter((step) => step.command === 'charge-now')).toHaveLength(8 * 4);
    expect(plan.worthOfIceMoneyPerKwh).toBeNull();
  });
});
