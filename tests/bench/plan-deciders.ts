/** Who decides: the plan on what can be known, the plan on what will be, the simple strategies, and nobody. */
import type { Strategy } from '../../src/commands.ts';
import type { SiteConfig } from '../../src/config.ts';
import { planInputs } from '../../src/cycle-plan.ts';
import { isHome, type Planned } from '../../src/cycle-values.ts';
import { limitAt } from '../../src/comfort-hours.ts';
import { meanOverRooms } from '../../src/points.ts';
import { createEstimator } from '../../src/estimation/estimator.ts';
import type { IceEstimate } from '../../src/estimation/types.ts';
import { createForecaster, type Forecast } from '../../src/forecasting/forecaster.ts';
import type { Scenario } from '../../src/forecasting/scenarios.ts';
import { planProblem } from '../../src/planning/build.ts';
import { timetablePlan } from '../../src/planning/fallback.ts';
import { commandAt, solvePlan, type Plan } from '../../src/planning/plan.ts';
import type { PlanProblem } from '../../src/planning/problem.ts';
import { simpleCommand } from '../../src/planning/strategies.ts';
import { priceSlots } from '../../src/tariff/prices.ts';
import { DAY_MS, HOUR_MS, slotStart } from '../../src/time.ts';
import type { PlanCase } from './plan-cases.ts';
import { toldIce, type Decider, type LoopOptions, type Quarter, type Sight } from './plan-loop.ts';

/** Plans are made afresh each hour (in life each quarter hour), and their steps followed in between. */
const REPLAN_MS = HOUR_MS;

/** Asked at the first tick of each quarter hour: whether that quarter begins an hour. */
const newHour = (nowMs: number): boolean => nowMs % REPLAN_MS < HOUR_MS / 4;

/** The mean of each hour's forecast, for strategies that foresee no more than a mean. */
export type MeanForecasts = Map<number, Forecast>;

/** Dispatch holds the rooms a little under their limit; a load foreseen for the limit itself would be too small. */
const UNDER_LIMIT_K = 0.4;

function atSetPoint(config: SiteConfig): SiteConfig {
  const { comfort } = config;
  const under = (limitC: number): number => limitC - UNDER_LIMIT_K;
  const sleepingLimitC = comfort.sleepingLimitC === null ? null : under(comfort.sleepingLimitC);
  return { ...config, comfort: { ...comfort, limitC: under(comfort.limitC), sleepingLimitC } };
}

/** The plan as in life: real estimator, unless the ice is told, real forecaster; storage priority until counting begins. */
export function plannedDecider(
  o: LoopOptions,
  seed: number,
  kept: { means: MeanForecasts; problems: PlanProblem[] },
  toldTheIce: boolean,
): Decider {
  const { config } = o.on;
  const { means, problems } = kept;
  const estimator = createEstimator(config, { seed, startMs: o.startMs });
  const forecaster = createForecaster(atSetPoint(config), { seed });
  const ice = ({ truth }: Sight): IceEstimate => (toldTheIce ? toldIce(truth, config) : estimator.estimate());
  return {
    strategy: 'planned',
    estimator: toldTheIce ? null : estimator,
    forecaster,
    decide: (sight) => {
      const { nowMs, state } = sight;
      const onTheHour = newHour(nowMs) || state.planned === null;
      if (nowMs <= o.countFromMs) {
        if (onTheHour) means.set(slotStart(nowMs, HOUR_MS), meanOf(forecaster.forecast(nowMs, null)));
        return simplePlanned('storage-priority', o.on, sight, latest(means, nowMs));
      }
      if (!onTheHour) return goingOn(sight, config);
      const forecast = forecaster.forecast(nowMs, null);
      means.set(slotStart(nowMs, HOUR_MS), meanOf(forecast));
      const planned = solved(problemOf(config, o.on, sight, forecast, ice(sight)), forecast);
      problems.push(planned.problem);
      return planned;
    },
  };
}

/** The same planner, told what weather and load will be, and the true ice. */
export function foresightDecider(
  o: LoopOptions,
  means: MeanForecasts,
  will: (nowMs: number) => Scenario,
): Decider {
  // With nothing left to chance there is nothing to keep a reserve for.
  const config = { ...o.on.config, planning: { ...o.on.config.planning, reserveKwh: 0 } };
  return {
    strategy: 'planned',
    estimator: null,
    forecaster: null,
    decide: (sight) => {
      const { nowMs, state } = sight;
      if (nowMs <= o.countFromMs) {
        return simplePlanned('storage-priority', o.on, sight, latest(means, nowMs));
      }
      if (!newHour(nowMs) && state.planned !== null) return goingOn(sight, config);
      const forecast = { ...latest(means, nowMs), scenarios: [will(nowMs)] };
      return solved(problemOf(config, o.on, sight, forecast, toldIce(sight.truth, config)), forecast);
    },
  };
}

/** Between plans the last one's steps go on, and a room near its limit is cooled. */
function goingOn({ nowMs, state, moment }: Sight, config: SiteConfig): Planned | null {
  const { planned } = state;
  if (!planned) return null;
  const roomC = meanOverRooms(moment.live, 'room-temperature');
  const limitC = limitAt(config.comfort, config.site.zone, nowMs);
  const near = roomC !== null && roomC > limitC - 0.5 && isHome(config, moment.live, nowMs);
  return {
    ...planned,
    command: commandAt(planned.plan, nowMs, near),
    plan: { ...planned.plan, madeMs: nowMs },
  };
}

/** A simple strategy, told the true ice and foreseeing the mean of what the plan foresaw. */
export function simpleDecider(
  o: LoopOptions,
  means: MeanForecasts,
  strategy: Exclude<Strategy, 'planned'>,
): Decider {
  return {
    strategy,
    estimator: null,
    forecaster: null,
    decide: (sight) => {
      const asked = sight.nowMs <= o.countFromMs ? 'storage-priority' : strategy;
      return simplePlanned(asked, o.on, sight, latest(means, sight.nowMs));
    },
  };
}

/** No cooling at all: what a house without the plant costs. */
export function idleDecider(o: LoopOptions, means: MeanForecasts): Decider {
  return {
    strategy: 'planned',
    estimator: null,
    forecaster: null,
    decide: (sight) => {
      const asked = sight.nowMs <= o.countFromMs ? 'storage-priority' : null;
      const planned = simplePlanned('storage-priority', o.on, sight, latest(means, sight.nowMs));
      return asked ? planned : { ...planned, command: 'hold' };
    },
  };
}

function simplePlanned(
  strategy: Exclude<Strategy, 'planned'>,
  on: PlanCase,
  sight: Sight,
  forecast: Forecast,
): Planned {
  const { config } = on;
  const ice = sight.stages.estimator.estimate();
  const problem = problemOf(config, on, sight, from(forecast, sight.nowMs), ice);
  const command = simpleCommand(strategy, problem, config.planning.timetable);
  return { plan: noPlan(sight.nowMs), problem, prices: [], forecast, strategy, command, reason: '' };
}

/** A simple strategy looks no further than its own command. */
const noPlan = (nowMs: number): Plan => ({ ...blankPlan, madeMs: nowMs });
const blankPlan = timetablePlan(
  {
    nowMs: 0,
    slotMs: HOUR_MS / 4,
    slots: 1,
    zone: 'Etc/UTC',
    timetable: [],
    iceKwh: 0,
    iceLowKwh: 0,
    iceHighKwh: 0,
  },
  '',
);

function solved(problem: PlanProblem, forecast: Forecast): Planned {
  const plan = solvePlan(problem, {
    fallBack: (note) => {
      throw new Error(note);
    },
  });
  return { plan, problem, prices: [], forecast, strategy: 'planned', command: plan.command, reason: '' };
}

function problemOf(
  config: SiteConfig,
  on: PlanCase,
  sight: Sight,
  forecast: Forecast,
  ice: IceEstimate,
): PlanProblem {
  const { nowMs, stages, state, moment, demand, houseW } = sight;
  const { slotMs } = config.planning;
  const slots = forecast.scenarios[0].loadW.length;
  const prices = priceSlots(config, slotStart(nowMs, slotMs), slotMs, slots, on.dated(nowMs));
  return planProblem(config, planInputs(stages, state, moment, ice, forecast, prices, { demand, houseW }));
}

function latest(means: MeanForecasts, nowMs: number): Forecast {
  for (let at = slotStart(nowMs, HOUR_MS), k = 0; k < 72; at -= HOUR_MS, k += 1) {
    const known = means.get(at);
    if (known) return known;
  }
  throw new Error('no forecast was made in three days');
}

function meanOf(forecast: Forecast): Forecast {
  const { scenarios } = forecast;
  const total = scenarios.reduce((sum, s) => sum + s.weight, 0);
  const meanSeries = (key: 'outdoorC' | 'sunWPerM2' | 'loadW' | 'latentW' | 'panelW'): Float64Array =>
    scenarios[0][key].map((_, t) => scenarios.reduce((sum, s) => sum + s.weight * s[key][t], 0) / total);
  const one: Scenario = {
    weight: 1,
    outdoorC: meanSeries('outdoorC'),
    sunWPerM2: meanSeries('sunWPerM2'),
    loadW: meanSeries('loadW'),
    latentW: meanSeries('latentW'),
    panelW: meanSeries('panelW'),
    warmKhPerKwh: scenarios.reduce((sum, s) => sum + s.weight * s.warmKhPerKwh, 0) / total,
  };
  return { ...forecast, scenarios: [one] };
}

/** A forecast from the slot of now on; past the last one made, the same hour of the day is as good as any. */
function from(forecast: Forecast, nowMs: number): Forecast {
  const past = Math.round((slotStart(nowMs, forecast.slotMs) - forecast.startMs) / forecast.slotMs);
  const shift = past % Math.round(DAY_MS / forecast.slotMs);
  if (shift <= 0) return forecast;
  const [s] = forecast.scenarios;
  const one = {
    ...s,
    outdoorC: s.outdoorC.subarray(shift),
    sunWPerM2: s.sunWPerM2.subarray(shift),
    loadW: s.loadW.subarray(shift),
    latentW: s.latentW.subarray(shift),
    panelW: s.panelW.subarray(shift),
  };
  return { ...forecast, startMs: forecast.startMs + shift * forecast.slotMs, scenarios: [one] };
}

/** What will be, from what was: the quarters of a run in which the rooms were always served. */
export function foresee(
  quarters: readonly Quarter[],
  startMs: number,
  panelW: (atMs: number) => number,
  warmKhPerKwh: number,
  config: SiteConfig,
): (nowMs: number) => Scenario {
  const { slotMs, horizonMs } = config.planning;
  const slots = Math.round(horizonMs / slotMs);
  return (nowMs) => {
    const first = Math.round((slotStart(nowMs, slotMs) - startMs) / slotMs);
    const series = (value: (quarter: Quarter, atMs: number) => number): Float64Array =>
      Float64Array.from({ length: slots }, (_, t) =>
        value(quarters[Math.min(first + t, quarters.length - 1)], startMs + (first + t + 0.5) * slotMs),
      );
    return {
      weight: 1,
      outdoorC: series((quarter) => quarter.outdoorC),
      sunWPerM2: series(() => 0),
      loadW: series((quarter) => quarter.deliveredW),
      latentW: series((quarter) => quarter.latentW),
      panelW: series((_, atMs) => panelW(atMs)),
      warmKhPerKwh,
    };
  };
}
