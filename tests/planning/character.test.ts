/** What a good operator would do, asked of the plan on days where the right answer is plain. */
import { describe, expect, it } from 'vitest';
import { charges } from '../../src/commands.ts';
import { solvePlan, type Plan } from '../../src/planning/plan.ts';
import type { PlanProblem, PlanScenario } from '../../src/planning/problem.ts';
import type { SolveOptions } from '../../src/planning/solve.ts';
import { fromWall, localClock } from '../../src/time.ts';
import { every, grid, HOUR_MS, plant, problem, scenario } from './problems.ts';

const SLOTS = 144;
const NOON = fromWall('Europe/Madrid', 2026, 7, 1, 12 * 60);
/** Hours since local noon. */
const hour = (t: number): number => t / 4;
const evening = (t: number, peakW: number): number => {
  const h = hour(t) % 24;
  return h >= 5 && h <= 13 ? peakW * Math.sin((Math.PI * (h - 5)) / 8) : 0;
};

/** Twelve evenings that differ by a tenth or so. */
function evenings(base: (k: number) => Partial<PlanScenario>): PlanScenario[] {
  return Array.from({ length: 12 }, (_, k) => scenario(SLOTS, base((k - 5.5) / 5.5)));
}

const leaky = plant({
  capacityKwh: 14,
  leakW: (ice, surroundC) => 2 * surroundC * Math.min(1, ice / 2),
  operate: (outdoorC) => ({ iceMakingW: 1000 - 12 * (outdoorC - 25), powerW: 500 + 8 * (outdoorC - 25) }),
});
const machine = { minOnMs: HOUR_MS / 3, minOffMs: HOUR_MS / 6, startMoney: 0.02 };

function plan(p: PlanProblem, options: SolveOptions = {}): Plan {
  return solvePlan(p, {
    ...options,
    fallBack: (note) => {
      throw new Error(note);
    },
  });
}

const makingHours = (made: Plan, fromHour: number, toHour: number): number =>
  made.steps.filter((step) => {
    const h = (step.startMs - NOON) / HOUR_MS;
    return charges(step.command) && h >= fromHour && h < toHour;
  }).length / 4;

describe('character of the plan', () => {
  it('leaves the bank empty the evening before a cool day', () => {
    const cool = plan(
      problem(SLOTS, {
        nowMs: NOON,
        iceKwh: 3,
        plant: leaky,
        chiller: machine,
        power: grid(SLOTS, (t) => (hour(t) >= 12 && hour(t) < 20 ? 0.1 : 0.2)),
        // Tonight is an evening as usual; tomorrow, and the days after it, need nothing.
        scenarios: evenings((k) => ({ loadW: every(SLOTS, (t) => (t < 56 ? evening(t, 500 + 60 * k) : 0)) })),
      }),
    );
    expect(makingHours(cool, 14, 36)).toBe(0);
    expect(cool.steps[143].iceKwh).toBeLessThan(1);
    const usual = plan(
      problem(SLOTS, {
        nowMs: NOON,
        iceKwh: 3,
        plant: leaky,
        chiller: machine,
        power: grid(SLOTS, (t) => (hour(t) >= 12 && hour(t) < 20 ? 0.1 : 0.2)),
        scenarios: evenings((k) => ({ loadW: every(SLOTS, (t) => evening(t, 500 + 60 * k)) })),
      }),
    );
    expect(makingHours(usual, 12, 20)).toBeGreaterThan(1);
  });

  it('makes ice in a mild night at the middle price rather than in a hot afternoon at the low one', () => {
    const outdoorC = every(SLOTS, (t) => 27 + 12 * Math.cos(((hour(t) - 4) / 24) * 2 * Math.PI));
    const p = problem(SLOTS, {
      nowMs: NOON + 8 * HOUR_MS,
      iceKwh: 0.5,
      plant: leaky,
      chiller: machine,
      // Clock hours of the plan, from 20:00: 12 ct at night, 11 ct from noon to 16:00, 25 ct else.
      power: grid(SLOTS, (t) => {
        const clock = (20 + hour(t)) % 24;
        return clock < 8 ? 0.12 : clock >= 12 && clock < 16 ? 0.11 : 0.25;
      }),
      scenarios: evenings((k) => ({
        outdoorC: outdoorC.map((_, t) => outdoorC[(t + 32) % 96] + k),
        loadW: every(SLOTS, (t) => evening((t + 32) % 96, 700 + 60 * k)),
      })),
    });
    const made = plan(p);
    const night = makingHours(made, 12, 20);
    const afternoon = makingHours(made, 24, 28);
    expect(night).toBeGreaterThan(2);
    expect(afternoon).toBeLessThan(night / 4);
    // 12 ct at 17 °C buys more ice than 11 ct at 38 °C.
    const [cold, hot] = [leaky.operate(17, 0), leaky.operate(38, 0)];
    expect((0.12 * cold.powerW) / cold.iceMakingW).toBeLessThan((0.11 * hot.powerW) / hot.iceMakingW);
  });

  it('saves what ice there is for the late peak of warm hours', () => {
    // The machine is forbidden by heat; 2 kWh must do. An early load that matters little, a late one that is costly
    // cannot be told apart by warm hours alone, so the early one is served only as far as the late one leaves.
    const load = every(SLOTS, (t) =>
      hour(t) >= 5 && hour(t) < 7 ? 900 : hour(t) >= 9 && hour(t) < 11 ? 900 : 0,
    );
    const p = problem(SLOTS, {
      nowMs: NOON,
      iceKwh: 2,
      plant: plant({ capacityKwh: 14 }),
      chiller: machine,
      // Making ice during the first load is cheap enough; during the second it is dear.
      power: grid(SLOTS, (t) => (hour(t) >= 8 ? 0.6 : 0.1)),
      scenarios: [scenario(SLOTS, { loadW: load, warmKhPerKwh: 4 })],
    });
    const made = plan(p, { endMoneyPerKwh: 0 });
    const at = (h: number) => made.steps[h * 4];
    expect(at(8).iceKwh).toBeGreaterThanOrEqual(1.75);
    expect(makingHours(made, 8, 24)).toBe(0);
    expect(made.expectedWarmKh).toBeLessThan(0.1);
    expect(at(11).iceKwh).toBeLessThan(0.6);
  });

  it('does not chatter on equal prices', () => {
    const p = problem(SLOTS, {
      nowMs: NOON,
      iceKwh: 1,
      plant: leaky,
      chiller: machine,
      power: grid(SLOTS, () => 0.2),
      scenarios: evenings((k) => ({ loadW: every(SLOTS, (t) => evening(t, 600 + 60 * k)) })),
    });
    const made = plan(p);
    const starts = made.steps.filter(
      (step, t) => charges(step.command) && (t === 0 || !charges(made.steps[t - 1].command)),
    );
    expect(starts.length).toBeLessThanOrEqual(3);
  });

  it('keeps its command from one plan to the next when nothing has changed', () => {
    let on = false;
    let since = NOON - 5 * HOUR_MS;
    let switches = 0;
    let iceKwh = 1;
    for (let t = 0; t < 16; t += 1) {
      const nowMs = NOON + t * 900_000;
      const made = plan(
        problem(SLOTS, {
          nowMs,
          iceKwh,
          plant: leaky,
          chiller: machine,
          chillerOn: on,
          chillerSinceMs: since,
          power: grid(SLOTS, () => 0.2),
          scenarios: evenings((k) => ({ loadW: every(SLOTS, (i) => evening(i + t, 600 + 60 * k)) })),
        }),
      );
      const next = charges(made.command);
      if (next !== on) {
        switches += 1;
        since = nowMs;
      }
      on = next;
      iceKwh = made.steps[1].iceKwh;
    }
    expect(switches).toBeLessThanOrEqual(2);
  }, 40_000);

  it.each([
    ['a 23-hour day', 2026, 3, 28],
    ['a 25-hour day', 2026, 10, 24],
  ])('plans through %s', (_, year, month, day) => {
    const zone = 'Europe/Madrid';
    const nowMs = fromWall(zone, year, month, day, 12 * 60);
    const clockHour = (t: number): number => Number(localClock(zone, nowMs + t * 900_000).slice(0, 2));
    const p = problem(SLOTS, {
      nowMs,
      iceKwh: 0.5,
      plant: leaky,
      chiller: machine,
      power: grid(SLOTS, (t) => (clockHour(t) < 6 ? 0.08 : 0.3)),
      scenarios: evenings((k) => ({
        loadW: every(SLOTS, (t) => (clockHour(t) >= 17 && t > 60 ? 900 + 60 * k : 0)),
      })),
    });
    const made = plan(p);
    const making = made.steps.filter((step) => charges(step.command));
    expect(making.length).toBeGreaterThan(8);
    for (const step of making.filter((one) => one.startMs < nowMs + 20 * HOUR_MS)) {
      expect(Number(localClock(zone, step.startMs).slice(0, 2))).toBeLessThan(6);
    }
    expect(made.steps[143].startMs - nowMs).toBe(143 * 900_000);
  });

  it('refuses to heat the room for nothing: a machine in the cooled room', () => {
    const base = problem(SLOTS, {
      nowMs: NOON,
      iceKwh: 0.5,
      plant: leaky,
      power: grid(SLOTS, () => 0.05),
      scenarios: evenings(() => ({
        outdoorC: every(SLOTS, () => 32),
        loadW: every(SLOTS, () => 500),
        warmKhPerKwh: 2,
      })),
    });
    const outdoors = plan({ ...base, chiller: { ...base.chiller, heatsRoom: false } });
    const inside = plan({ ...base, chiller: { ...base.chiller, heatsRoom: true } });
    expect(makingHours(outdoors, 0, 36)).toBeGreaterThan(10);
    expect(makingHours(inside, 0, 36)).toBe(0);
  });

  it('lets the bank melt out on a mild evening when the estimate has grown unsure, and not on a hot one', () => {
    const make = (peakW: number, wide: number): Plan =>
      plan(
        problem(SLOTS, {
          nowMs: NOON,
          iceKwh: 3.4,
          iceLowKwh: 3.4 - wide,
          iceHighKwh: 3.4 + wide,
          // The last 2.5 kWh are cold water: ice is gone while there is still something to cool with.
          plant: { ...leaky, inventoryPct: (ice) => Math.max(0, (100 * (ice - 2.5)) / 11.5) },
          chiller: machine,
          power: grid(SLOTS, (t) => (hour(t) % 24 >= 12 && hour(t) % 24 < 20 ? 0.1 : 0.25)),
          scenarios: evenings((k) => ({ loadW: every(SLOTS, (t) => evening(t, peakW * (1 + 0.1 * k))) })),
        }),
      );
    expect(make(240, 0.1).meltsOut).toBe(false);
    expect(make(240, 2).meltsOut).toBe(true);
    expect(make(1500, 2).meltsOut).toBe(false);
  });

  it('uses sun that nobody else takes, and never the battery below its floor', () => {
    const panels = every(SLOTS, (t) => {
      const clock = (12 + hour(t)) % 24;
      return clock >= 8 && clock < 18 ? 2200 * Math.sin((Math.PI * (clock - 8)) / 10) : 0;
    });
    const p = problem(SLOTS, {
      nowMs: NOON,
      iceKwh: 1,
      plant: leaky,
      chiller: machine,
      scenarios: evenings((k) => ({
        panelW: panels,
        loadW: every(SLOTS, (t) => evening(t, 600 + 50 * k)),
      })),
      power: {
        kind: 'island',
        houseW: every(SLOTS, () => 150),
        battery: {
          capacityKwh: 5,
          floorKwh: 1.5,
          nowKwh: 4.8,
          wearMoneyPerKwh: 0.06,
          roundTrip: 1,
          mostChargeW: 2000,
          mostDischargeW: 2000,
        },
        generator: null,
        inverterW: 3000,
      },
    });
    const made = plan(p);
    expect(made.command).toBe('charge-now');
    const dark = plan({
      ...p,
      scenarios: p.scenarios.map((s) => ({
        ...s,
        panelW: every(SLOTS, () => 0),
        loadW: every(SLOTS, () => 0),
      })),
      power: {
        ...p.power,
        battery: { ...(p.power as never as { battery: object }).battery, nowKwh: 1.5 },
      } as never,
    });
    expect(makingHours(dark, 0, 36)).toBe(0);
  });
});
