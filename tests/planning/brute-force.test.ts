/**
 * The dynamic programme against every possible sequence of commands. The numbers are chosen so that ice always lands
 * on the grid: then nothing is interpolated and the two must agree to rounding.
 */
import { describe, expect, it } from 'vitest';
import { createRandom, type Random } from '../../src/numerics/random.ts';
import { cheapest, weigh } from '../../src/planning/evaluate.ts';
import { standingNow } from '../../src/planning/forward.ts';
import type { PlanProblem } from '../../src/planning/problem.ts';
import { solve } from '../../src/planning/solve.ts';
import { every, grid, plant, problem, scenario } from './problems.ts';

const SLOTS = 6;
/** One slot of making is 0.25 kWh, and so is one point of the grid. */
const STEP_KWH = 0.25;
const POINTS = 13;

function randomProblem(random: Random): PlanProblem {
  const pick = (most: number): number => Math.floor(random.next() * (most + 1));
  const price = every(SLOTS, () => 0.05 + 0.3 * random.next());
  const load = every(SLOTS, () => 1000 * pick(2));
  return problem(SLOTS, {
    iceKwh: STEP_KWH * pick(6),
    scenarios: [scenario(SLOTS, { loadW: load, warmKhPerKwh: 0.2 + random.next() })],
    power: grid(SLOTS, (t) => price[t]),
    plant: plant({ capacityKwh: STEP_KWH * (POINTS - 1) }),
    chillerOn: random.next() < 0.5,
    chiller: {
      minOnMs: 900_000 * pick(3),
      minOffMs: 900_000 * pick(2),
      startMoney: 0.03 * random.next(),
      chargesWhileDischarging: random.next() < 0.7,
    },
  });
}

/** Least money over every sequence of commands, by the rules of the words "minimum run" and "minimum rest". */
function bruteForce(p: PlanProblem): number {
  const buy = p.power.kind === 'grid' ? p.power.buy : [];
  const [only] = p.scenarios;
  const unmetMoney = p.warmHourMoney * only.warmKhPerKwh;
  const slotsOf = (ms: number): number => Math.max(1, Math.ceil(ms / p.slotMs));
  const least = { on: slotsOf(p.chiller.minOnMs), off: slotsOf(p.chiller.minOffMs) };
  const go = (t: number, ice: number, on: boolean, ran: number): number => {
    if (t === p.slots) return 0;
    let best = Infinity;
    for (const charge of [false, true]) {
      if (charge !== on && ran < (on ? least.on : least.off)) continue;
      for (const discharge of [false, true]) {
        if (charge && discharge && !p.chiller.chargesWhileDischarging) continue;
        const need = only.loadW[t] / 4000;
        const served = discharge ? Math.min(need, ice + (charge ? STEP_KWH : 0)) : 0;
        const room = p.plant.capacityKwh - (ice - served);
        const made = charge ? Math.min(STEP_KWH, room) : 0;
        const cutOff = charge ? 1 - made / STEP_KWH : 0;
        const money =
          made * 0.5 * buy[t] +
          (need - served) * unmetMoney +
          (charge && !on ? p.chiller.startMoney : 0) +
          cutOff * p.chiller.startMoney;
        best = Math.min(best, money + go(t + 1, ice - served + made, charge, charge === on ? ran + 1 : 1));
      }
    }
    return best;
  };
  return go(0, p.iceKwh, p.chillerOn, Infinity);
}

describe('dynamic programme against brute force', () => {
  it('has no gap at all on 60 random problems of 6 slots', () => {
    const random = createRandom(20_261);
    for (let k = 0; k < 60; k += 1) {
      const p = randomProblem(random);
      const work = solve(p, { points: POINTS, endMoneyPerKwh: 0 });
      const money = new Float64Array(4);
      weigh(work, 0, 0, standingNow(work), money);
      expect(money[cheapest(money, p.chillerOn)]).toBeCloseTo(bruteForce(p), 9);
    }
  });

  it('plans without foreseeing: one first command for a hot and a cool evening, then one plan for each', () => {
    const random = createRandom(7);
    for (let k = 0; k < 20; k += 1) {
      const ice = { iceKwh: 0.5, iceLowKwh: 0.5, iceHighKwh: 0.5 };
      const base = { ...randomProblem(random), ...ice, chillerOn: false };
      const hot = scenario(SLOTS, {
        loadW: every(SLOTS, (t) => (t > 0 ? 1000 : 0)),
        outdoorC: every(SLOTS, () => 30),
        warmKhPerKwh: 1,
      });
      const cool = { ...hot, loadW: every(SLOTS, () => 0), outdoorC: every(SLOTS, () => 20) };
      const p = { ...base, scenarios: [hot, hot, hot, hot, cool, cool, cool, cool] };
      const work = solve(p, { points: POINTS, endMoneyPerKwh: 0, classes: 2 });
      const money = new Float64Array(4);
      weigh(work, 0, 0, standingNow(work), money);
      const together = bruteForceTwo(p, hot, cool);
      expect(Math.min(...money)).toBeCloseTo(together, 9);
      const foreseen = (bruteForce({ ...p, scenarios: [hot] }) + bruteForce({ ...p, scenarios: [cool] })) / 2;
      expect(Math.min(...money)).toBeGreaterThanOrEqual(foreseen - 1e-9);
    }
  });
});

/** Hot and cool evenings are told apart after the first slot: the least mean money over first commands. */
function bruteForceTwo(
  p: PlanProblem,
  hot: PlanProblem['scenarios'][number],
  cool: PlanProblem['scenarios'][number],
): number {
  const unmet = (s: typeof hot): number => (s.loadW[0] / 4000) * p.warmHourMoney * s.warmKhPerKwh;
  const buy = p.power.kind === 'grid' ? p.power.buy : [];
  const rest = (s: typeof hot, ice: number, on: boolean): number => {
    const later = { ...p, iceKwh: ice, chillerOn: on, slots: p.slots - 1 };
    const cut = (values: ArrayLike<number>): Float64Array => Float64Array.from(values).subarray(1);
    const shifted = {
      ...later,
      power: grid(p.slots - 1, (t) => buy[t + 1]),
      scenarios: [{ ...s, loadW: cut(s.loadW), outdoorC: cut(s.outdoorC) }],
      nowMs: p.nowMs + p.slotMs,
    };
    return bruteForceFrom(shifted, on ? 1 : Infinity);
  };
  const idle = (s: typeof hot): number => unmet(s) + rest(s, p.iceKwh, false);
  const making = (s: typeof hot): number =>
    unmet(s) + STEP_KWH * 0.5 * buy[0] + p.chiller.startMoney + rest(s, p.iceKwh + STEP_KWH, true);
  return Math.min((idle(hot) + idle(cool)) / 2, (making(hot) + making(cool)) / 2);
}

/** As `bruteForce`, but the machine has been in its state for some slots only. */
function bruteForceFrom(p: PlanProblem, ran: number): number {
  if (ran === Infinity) return bruteForce(p);
  const least = Math.max(1, Math.ceil(p.chiller.minOnMs / p.slotMs));
  return least <= ran ? bruteForce(p) : bruteForceMustRun(p, least - ran);
}

/** The machine must run for some slots more. */
function bruteForceMustRun(p: PlanProblem, slots: number): number {
  if (slots <= 0 || p.slots === 0) return p.slots === 0 ? 0 : bruteForce(p);
  const buy = p.power.kind === 'grid' ? p.power.buy : [];
  const [only] = p.scenarios;
  const need = only.loadW[0] / 4000;
  const cut = (values: ArrayLike<number>): Float64Array => Float64Array.from(values).subarray(1);
  let best = Infinity;
  for (const discharge of [false, true]) {
    if (discharge && !p.chiller.chargesWhileDischarging) continue;
    const served = discharge ? Math.min(need, p.iceKwh + STEP_KWH) : 0;
    const made = Math.min(STEP_KWH, p.plant.capacityKwh - (p.iceKwh - served));
    const money =
      made * 0.5 * buy[0] +
      (need - served) * p.warmHourMoney * only.warmKhPerKwh +
      (1 - made / STEP_KWH) * p.chiller.startMoney;
    const later = {
      ...p,
      iceKwh: p.iceKwh - served + made,
      slots: p.slots - 1,
      power: grid(p.slots - 1, (t) => buy[t + 1]),
      scenarios: [{ ...only, loadW: cut(only.loadW), outdoorC: cut(only.outdoorC) }],
    };
    best = Math.min(best, money + bruteForceMustRun(later, slots - 1));
  }
  return best;
}
