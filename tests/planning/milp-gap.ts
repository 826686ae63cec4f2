/** How far the dynamic programme is from HiGHS on random small problems; shared by the test and the benchmark. */
import loadHighs from 'highs';
import { createRandom, type Random } from '../../src/numerics/random.ts';
import { advance, cheapest, weigh } from '../../src/planning/evaluate.ts';
import { standingNow } from '../../src/planning/forward.ts';
import type { PlanProblem } from '../../src/planning/problem.ts';
import { solve } from '../../src/planning/solve.ts';
import { linearProgramme, type LinearPlant } from './milp.ts';
import { every, grid, plant, problem, scenario } from './problems.ts';

// The package's types call it CommonJS; what Node loads is a module whose default is the loader.
const load = loadHighs as unknown as { (): ReturnType<typeof loadHighs.default> };

const SLOTS = 20;
const SLOT_MS = 1_800_000;

export interface Gap {
  readonly optimalMoney: number;
  readonly plannedMoney: number;
  readonly gapPct: number;
}

/** Gap of the policy as lived, not of its own expectation, over `count` random problems of 10 hours. */
export async function milpGaps(seed: number, count: number, points?: number): Promise<Gap[]> {
  const solver = await load();
  const random = createRandom(seed);
  const gaps: Gap[] = [];
  for (let k = 0; k < count; k += 1) {
    const { p, linear, endMoneyPerKwh } = randomProblem(random);
    const answer = solver.solve(linearProgramme(p, linear, endMoneyPerKwh), { mip_rel_gap: 1e-4 });
    if (answer.Status !== 'Optimal') throw new Error(`HiGHS answers ${answer.Status} on problem ${k}.`);
    const optimalMoney = answer.ObjectiveValue;
    const plannedMoney = lived(p, endMoneyPerKwh, points);
    // Relative to what the optimum spends: after the worth of left ice is taken off, some objectives are near nothing.
    const spentMoney = optimalMoney + endMoneyPerKwh * (answer.Columns[`ice${SLOTS}`]?.Primal ?? 0);
    gaps.push({ optimalMoney, plannedMoney, gapPct: (100 * (plannedMoney - optimalMoney)) / spentMoney });
  }
  return gaps;
}

/** Prices in periods, an evening of load, a machine that is weaker in the hot hours. */
function randomProblem(random: Random): { p: PlanProblem; linear: LinearPlant; endMoneyPerKwh: number } {
  const uniform = (low: number, high: number): number => low + (high - low) * random.next();
  const prices = [uniform(0.05, 0.12), uniform(0.12, 0.22), uniform(0.2, 0.4)];
  const firstCut = Math.floor(uniform(4, 10));
  const secondCut = Math.floor(uniform(11, 17));
  const price = (t: number): number => prices[t < firstCut ? 0 : t < secondCut ? 1 : 2];
  const peak = uniform(600, 2200);
  const load = every(SLOTS, (t) => (t < 7 ? 0 : Math.max(0, peak * Math.sin(((t - 7) / 12) * Math.PI))));
  const outdoor = every(SLOTS, (t) => 20 + 14 * Math.sin((Math.PI * t) / SLOTS));
  const linear: LinearPlant = {
    leakPerHour: uniform(0.002, 0.012),
    meltWPerKwh: uniform(500, 1500),
    coilW: uniform(1500, 3000),
    makingW: outdoor.map((c) => 1100 - 9 * (c - 20)),
    powerW: outdoor.map((c) => 500 + 7 * (c - 20)),
  };
  const iceKwh = uniform(0, 2);
  const p = problem(SLOTS, {
    slotMs: SLOT_MS,
    iceKwh,
    scenarios: [scenario(SLOTS, { loadW: load, outdoorC: outdoor, warmKhPerKwh: uniform(0.5, 5) })],
    power: grid(SLOTS, price),
    plant: plant({
      capacityKwh: uniform(6, 14),
      meltLimitW: (ice) => Math.min(linear.coilW, linear.meltWPerKwh * ice),
      leakW: (ice) => linear.leakPerHour * ice * 1000,
      operate: (c) => ({ iceMakingW: 1100 - 9 * (c - 20), powerW: 500 + 7 * (c - 20) }),
    }),
    chillerOn: random.next() < 0.3,
    chiller: { minOnMs: SLOT_MS * 2, minOffMs: SLOT_MS, startMoney: uniform(0, 0.05) },
  });
  // Ice that is left is worth the cheapest that it can be made for, less a fifth for the leak until it is used.
  return { p, linear, endMoneyPerKwh: 0.8 * 0.5 * prices[0] };
}

/** Money of living the policy through the one scenario. */
function lived(p: PlanProblem, endMoneyPerKwh: number, points?: number): number {
  const work = solve(p, { endMoneyPerKwh, ...(points ? { points } : {}) });
  const at = standingNow(work);
  const money = new Float64Array(4);
  let paid = 0;
  for (let t = 0; t < p.slots; t += 1) {
    weigh(work, t, 0, at, money);
    paid += advance(work, t, 0, at, cheapest(money, false));
  }
  return paid - endMoneyPerKwh * at.iceKwh;
}
