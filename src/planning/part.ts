/** The later part of a problem, as it will be seen when its first slots are over. */
import type { GridPower, IslandPower, PlanProblem, PlanScenario } from './problem.ts';

type Cut = (values: ArrayLike<number>) => Float64Array;

/** A problem of single slots from slot `from` on; nothing of its present state is moved on but the time. */
export function partFrom(problem: PlanProblem, from: number): PlanProblem {
  if (from === 0) return problem;
  const { nowMs, slotMs, slots, scenarios, power } = problem;
  const cut: Cut = (values) =>
    values instanceof Float64Array
      ? values.subarray(from, slots)
      : Float64Array.from(values).subarray(from, slots);
  return {
    ...problem,
    nowMs: (Math.floor(nowMs / slotMs) + from) * slotMs,
    slots: slots - from,
    scenarios: scenarios.map((s) => scenarioPart(s, cut)),
    limitC: cut(problem.limitC),
    surroundC: cut(problem.surroundC),
    power: power.kind === 'grid' ? gridPart(power, cut) : islandPart(power, cut),
  };
}

function scenarioPart(scenario: PlanScenario, cut: Cut): PlanScenario {
  const { outdoorC, loadW, latentW, panelW } = scenario;
  return {
    ...scenario,
    outdoorC: cut(outdoorC),
    loadW: cut(loadW),
    ...(latentW ? { latentW: cut(latentW) } : {}),
    panelW: cut(panelW),
  };
}

function gridPart(power: GridPower, cut: Cut): GridPower {
  const { demand, buy, sell, houseW } = power;
  return {
    ...power,
    buy: cut(buy),
    sell: cut(sell),
    houseW: cut(houseW),
    demand: demand && { ...demand, measured: cut(demand.measured) },
  };
}

function islandPart(power: IslandPower, cut: Cut): IslandPower {
  const { generator, houseW } = power;
  return {
    ...power,
    houseW: cut(houseW),
    generator: generator && { ...generator, quiet: cut(generator.quiet) },
  };
}
