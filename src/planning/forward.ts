/** Lives commands forward through every scenario, for what the plan will probably look like. */
import { advance, cheapest, weigh, type Standing } from './evaluate.ts';
import { stateNow } from './machine-states.ts';
import { slotHours, type PlanProblem } from './problem.ts';
import { rowOf } from './tables.ts';
import { valueAt, valueBetween, type Work } from './work.ts';

export interface Paths {
  /** Ice at the start of a slot, and the command of it: [slot × scenarios + scenario]. */
  readonly iceKwh: Float64Array;
  readonly command: Uint8Array;
  readonly expectedMoney: number;
  readonly expectedWarmKh: number;
}

export function standingNow(work: Work): Standing {
  const { problem, states } = work;
  const battery = problem.power.kind === 'island' ? (problem.power.battery?.nowKwh ?? 0) : 0;
  return {
    iceKwh: clampIce(problem, problem.iceKwh),
    batteryKwh: Math.min(Math.max(battery, 0), work.island?.capacityKwh ?? 0),
    machine: stateNow(problem, states),
  };
}

const clampIce = (problem: PlanProblem, iceKwh: number): number =>
  Math.min(Math.max(iceKwh, 0), problem.plant.capacityKwh);

/** Lives the best policy. The first command is the same for all scenarios: it is the one that is given. */
export function liveForward(work: Work, firstCommand: number): Paths {
  const { classes, problem } = work;
  const count = problem.scenarios.length;
  const money = new Float64Array(4);
  return live(work, (t, s, at) => {
    if (t === 0) return firstCommand;
    weigh(work, t, classes.of[t * count + s], at, money);
    return cheapest(money, false);
  });
}

/**
 * Lives every scenario under the commands that are chosen for it. Each starts from another quantile of the estimate, so
 * that the band holds what is not known of the ice as well as of the weather.
 */
export function live(work: Work, choose: (t: number, s: number, at: Standing) => number): Paths {
  const { problem, classes } = work;
  const { slots, scenarios } = problem;
  const count = scenarios.length;
  const iceKwh = new Float64Array((slots + 1) * count);
  const command = new Uint8Array(slots * count);
  let expectedMoney = 0;
  let expectedWarmKh = 0;
  for (let s = 0; s < count; s += 1) {
    const at = { ...standingNow(work), iceKwh: iceQuantile(problem, spreadOut(s)) };
    for (let t = 0; t < slots; t += 1) {
      iceKwh[t * count + s] = at.iceKwh;
      const chosen = choose(t, s, at);
      command[t * count + s] = chosen;
      const paid = advance(work, t, s, at, chosen);
      const warmKh = work.outcome.unmetKwh * scenarios[s].warmKhPerKwh;
      expectedMoney += classes.weight[s] * (paid - warmKh * problem.warmHourMoney);
      expectedWarmKh += classes.weight[s] * warmKh;
    }
    iceKwh[slots * count + s] = at.iceKwh;
  }
  return { iceKwh, command, expectedMoney, expectedWarmKh };
}

/** The s-th of a sequence that fills (0, 1) evenly in any order of growth: van der Corput 1935, base 2. */
function spreadOut(s: number): number {
  let value = 0;
  let half = 0.5;
  for (let k = s + 1; k > 0; k = Math.floor(k / 2)) {
    value += (k % 2) * half;
    half /= 2;
  }
  return value;
}

/** Ice at a quantile of the estimate: normal on either side, by the logistic curve that differs from it by 0.01. */
function iceQuantile(problem: PlanProblem, u: number): number {
  const z = Math.log(u / (1 - u)) / 1.702;
  const side = z < 0 ? problem.iceKwh - problem.iceLowKwh : problem.iceHighKwh - problem.iceKwh;
  return clampIce(problem, problem.iceKwh + (z * Math.max(0, side)) / 1.645);
}

/** Expected money when a command is held for an hour from now and the best follows. */
export function holdForAnHour(work: Work, command: number): number {
  const { problem, classes } = work;
  const count = problem.scenarios.length;
  const most = Math.min(problem.slots, Math.max(1, Math.round(3_600_000 / problem.slotMs)));
  let money = 0;
  for (let s = 0; s < count; s += 1) {
    const at = standingNow(work);
    let paid = 0;
    for (let t = 0; t < most; t += 1) {
      paid += advance(work, t, s, at, command) + (t > 0 ? holdingAt(work, t, at.iceKwh) : 0);
    }
    const next = valueAt(work, most, classes.of[most * count + s], at.machine);
    money += classes.weight[s] * (paid + valueBetween(work, next, at.iceKwh, at.batteryKwh));
  }
  return money;
}

function holdingAt(work: Work, t: number, iceKwh: number): number {
  const { tables, holding } = work;
  const place = iceKwh / tables.stepKwh;
  const i = place >= tables.points - 1 ? tables.points - 2 : Math.floor(place);
  const at = t * tables.points + i;
  return holding[at] + (place - i) * (holding[at + 1] - holding[at]);
}

/**
 * When the ice runs out for a scenario if no more is made and the rooms are served, from some ice; null when it
 * lasts to the end of the plan. Ice has run out when it, and not the coil, can no longer give what is needed.
 */
export function runsOutAtSlot(work: Work, s: number, iceKwh: number): number | null {
  const { problem, tables } = work;
  const at: Standing = { ...standingNow(work), iceKwh: clampIce(problem, iceKwh), machine: 0 };
  const half = Math.floor(tables.points / 2);
  for (let t = 0; t < problem.slots; t += 1) {
    const row = tables.meltRow[t] * tables.points;
    const needKwh =
      (Math.min(problem.scenarios[s].loadW[t], tables.meltW[row + half]) * slotHours(problem, t)) / 1000;
    advance(work, t, s, at, 2);
    if (needKwh > 0 && work.outcome.deliveredKwh < 0.8 * needKwh) return t;
  }
  return null;
}

/** Electricity of the ice machine in an hour from now, kWh, at half the inventory and the mean outdoor temperature. */
export function machineHourKwh(work: Work): number {
  const { problem, tables, classes } = work;
  let outdoorC = 0;
  problem.scenarios.forEach((s, k) => (outdoorC += classes.weight[k] * s.outdoorC[0]));
  const row = Math.round(rowOf(tables, outdoorC)) * tables.points;
  return tables.powerW[row + Math.floor(tables.points / 2)] / 1000;
}
