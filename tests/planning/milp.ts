/**
 * The same deterministic problem as a mixed-integer linear programme, written independently of the planner from the
 * words of the problem alone, for HiGHS. On/off and starts are binary; ice, delivery and unmet load are continuous.
 */
import type { PlanProblem } from '../../src/planning/problem.ts';

/** Figures that the linear programme needs beside a problem: a leak in proportion to the ice, a melt limit through it. */
export interface LinearPlant {
  readonly leakPerHour: number;
  readonly meltWPerKwh: number;
  readonly coilW: number;
  readonly makingW: ArrayLike<number>;
  readonly powerW: ArrayLike<number>;
}

/** The problem in CPLEX LP format. One scenario, a grid tariff, no pump and no fan. */
export function linearProgramme(p: PlanProblem, plant: LinearPlant, endMoneyPerKwh: number): string {
  const buy = p.power.kind === 'grid' ? p.power.buy : [];
  const [only] = p.scenarios;
  const unmetMoney = p.warmHourMoney * only.warmKhPerKwh;
  const hours = p.slotMs / 3_600_000;
  const objective: string[] = [];
  const rows: string[] = [];
  const bounds: string[] = [];
  const binaries: string[] = [];
  for (let t = 0; t < p.slots; t += 1) {
    const makesKwh = (plant.makingW[t] * hours) / 1000;
    const perIce = plant.powerW[t] / plant.makingW[t];
    const needKwh = (only.loadW[t] * hours) / 1000;
    objective.push(
      // A machine that a full bank stops will have to start again: so much of a start as it did not run.
      `${num(perIce * buy[t] - p.chiller.startMoney / makesKwh)} made${t}`,
      `${num(p.chiller.startMoney)} on${t}`,
      `${num(p.chiller.startMoney)} start${t}`,
      `${num(unmetMoney)} unmet${t}`,
    );
    rows.push(
      `ice${t + 1} - ${num(1 - plant.leakPerHour * hours)} ice${t} - made${t} + given${t} = 0`,
      // A machine that is on makes all it can, unless the bank is full at the end of the slot.
      `made${t} - ${num(makesKwh)} on${t} <= 0`,
      `made${t} - ${num(makesKwh)} on${t} + ${num(makesKwh)} full${t} >= 0`,
      `ice${t + 1} - ${num(p.plant.capacityKwh)} full${t} >= 0`,
      `given${t} + unmet${t} = ${num(needKwh)}`,
      `given${t} - ${num((plant.meltWPerKwh * hours) / 1000)} ice${t} <= 0`,
      t === 0 ? `start0 - on0 >= ${p.chillerOn ? -1 : 0}` : `start${t} - on${t} + on${t - 1} >= 0`,
    );
    bounds.push(
      `0 <= ice${t + 1} <= ${num(p.plant.capacityKwh)}`,
      `0 <= given${t} <= ${num((plant.coilW * hours) / 1000)}`,
    );
    binaries.push(`on${t}`, `start${t}`, `full${t}`);
  }
  bounds.push(`ice0 = ${num(p.iceKwh)}`);
  objective.push(`${num(-endMoneyPerKwh)} ice${p.slots}`);
  return [
    'Minimize',
    ` obj: ${objective.join(' + ').replaceAll('+ -', '- ')}`,
    'Subject To',
    ...[...rows, ...shortestRuns(p)].map((row, k) => ` c${k}: ${row}`),
    'Bounds',
    ...bounds.map((bound) => ` ${bound}`),
    'Binary',
    ` ${binaries.join(' ')}`,
    'End',
  ].join('\n');
}

/** Once on, on for the shortest run; once off, off for the shortest rest; runs may reach past the end. */
function shortestRuns(p: PlanProblem): string[] {
  const rows: string[] = [];
  const on = Math.max(1, Math.ceil(p.chiller.minOnMs / p.slotMs));
  const off = Math.max(1, Math.ceil(p.chiller.minOffMs / p.slotMs));
  for (let t = 0; t < p.slots; t += 1) {
    for (let k = t + 1; k < Math.min(p.slots, t + on); k += 1) {
      rows.push(t === 0 ? `on${k} - on0 >= ${p.chillerOn ? -1 : 0}` : `on${k} - on${t} + on${t - 1} >= 0`);
    }
    for (let k = t + 1; k < Math.min(p.slots, t + off); k += 1) {
      rows.push(t === 0 ? `on${k} - on0 <= ${p.chillerOn ? 0 : 1}` : `on${k} + on${t - 1} - on${t} <= 1`);
    }
  }
  return rows;
}

const num = (value: number): string => value.toFixed(9);
