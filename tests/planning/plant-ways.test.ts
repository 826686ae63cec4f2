/** The ways a plant can work, and what the plan makes of each: direct cooling, one coil for both, a demand charge, the end. */
import { describe, expect, it } from 'vitest';
import { charges } from '../../src/commands.ts';
import { solvePlan, type Plan } from '../../src/planning/plan.ts';
import type { PlanProblem } from '../../src/planning/problem.ts';
import type { SolveOptions } from '../../src/planning/solve.ts';
import { fromWall, localClock } from '../../src/time.ts';
import { every, grid, HOUR_MS, plant, problem, scenario } from './problems.ts';

const SLOTS = 144;
const ZONE = 'Europe/Madrid';
const start = (hour: number): number => fromWall(ZONE, 2026, 7, 1, hour * 60);
const clockOf = (nowMs: number, t: number): number =>
  Number(localClock(ZONE, nowMs + t * 900_000).slice(0, 2));

function plan(p: PlanProblem, options: SolveOptions = {}): Plan {
  return solvePlan(p, {
    ...options,
    fallBack: (note) => {
      throw new Error(note);
    },
  });
}

/** Somebody home with 700 W of heat from 18 to 23, in eight scenarios that differ by a few per cent. */
function evenings(nowMs: number) {
  return Array.from({ length: 8 }, (_, k) =>
    scenario(SLOTS, {
      loadW: every(SLOTS, (t) => (clockOf(nowMs, t) >= 18 && clockOf(nowMs, t) < 23 ? 640 + 20 * k : 0)),
    }),
  );
}

const machine = { minOnMs: HOUR_MS / 3, minOffMs: HOUR_MS / 6, startMoney: 0.02 };

describe('a machine that can cool past the bank', () => {
  const nowMs = start(18);
  const p = problem(SLOTS, {
    nowMs,
    iceKwh: 0.2,
    // What little ice there is gives next to nothing.
    plant: plant({ meltLimitW: (ice) => 150 * Math.min(1, ice) }),
    chiller: machine,
    scenarios: evenings(nowMs),
  });

  it('does so when there is no ice, and warm hours are fewer for it', () => {
    const direct = plan({ ...p, chiller: { ...p.chiller, directCooling: true } });
    const through = plan(p);
    expect(direct.command).toBe('charge-and-discharge');
    expect(direct.expectedWarmKh ?? 0).toBeLessThan((through.expectedWarmKh ?? 0) / 2);
  });
});

describe('a coil that either freezes or melts', () => {
  const nowMs = start(18);
  const p = problem(SLOTS, { nowMs, iceKwh: 1.5, chiller: machine, scenarios: evenings(nowMs) });
  const both = (made: Plan): number =>
    made.steps.filter((step) => step.command === 'charge-and-discharge').length;

  it('is never told to do both', () => {
    expect(both(plan({ ...p, chiller: { ...p.chiller, chargesWhileDischarging: false } }))).toBe(0);
    expect(both(plan(p))).toBeGreaterThan(0);
  });
});

describe('the end of the plan', () => {
  const nowMs = start(20);
  // The plan ends at 8 in the morning, before an evening that it does not see.
  const p = problem(SLOTS, {
    nowMs,
    iceKwh: 3,
    plant: plant({ capacityKwh: 14, leakW: (ice) => 30 * Math.min(1, ice) }),
    chiller: machine,
    power: grid(SLOTS, (t) => (clockOf(nowMs, t) < 8 ? 0.08 : 0.3)),
    scenarios: evenings(nowMs),
  });
  const lastNight = (made: Plan): number =>
    made.steps.filter((step, t) => t >= 112 && charges(step.command)).length / 4;

  it('leaves the ice that the evening after it will want', () => {
    expect(lastNight(plan(p))).toBeGreaterThan(2);
    expect(plan(p).steps[143].iceKwh).toBeGreaterThan(3);
  });

  it('would leave none if ice were worth nothing there', () => {
    expect(lastNight(plan(p, { endMoneyPerKwh: 0 }))).toBe(0);
  });
});

describe('a demand charge', () => {
  const nowMs = start(12);
  const houseW = every(SLOTS, (t) => (clockOf(nowMs, t) >= 19 && clockOf(nowMs, t) < 21 ? 1400 : 200));
  const charged = (moneyPerKw: number, peakSoFarW: number): Plan =>
    plan(
      problem(SLOTS, {
        nowMs,
        iceKwh: 1,
        chiller: machine,
        scenarios: evenings(nowMs),
        power: {
          kind: 'grid',
          // The evening is the cheapest time to make ice, but for the peak.
          buy: every(SLOTS, (t) => (clockOf(nowMs, t) >= 19 && clockOf(nowMs, t) < 21 ? 0.1 : 0.2)),
          sell: every(SLOTS, () => 0),
          houseW,
          demand: { moneyPerKw, peakSoFarW, measured: every(SLOTS, () => 1), nightsLeft: 5 },
        },
      }),
    );
  const onTop = (made: Plan): number =>
    made.steps.filter((step) => {
      const clock = Number(localClock(ZONE, step.startMs).slice(0, 2));
      return charges(step.command) && clock >= 19 && clock < 21;
    }).length;

  it('keeps the machine off the top of what the house draws, until the peak has been paid for', () => {
    expect(onTop(charged(0, 1400))).toBeGreaterThan(4);
    expect(onTop(charged(12, 1400))).toBe(0);
    expect(onTop(charged(12, 2000))).toBeGreaterThan(4);
  });
});
