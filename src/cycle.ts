/**
 * Start reading here. Two functions are the whole job:
 *   replan()  every quarter hour: ice on hand → forecast → prices → plan
 *   tick()    every half minute:  readings → estimate → request → interlocks → order and record
 * Pure: stages and values come in, values go out. The stages do not know each other; they meet here.
 */
import type { SiteConfig } from './config.ts';
import { decided, planInputs, iceOf, timetableInputs, islandPrices } from './cycle-plan.ts';
import { recordOf } from './cycle-record.ts';
import { requestOf } from './cycle-request.ts';
import type { Stages, Moment, Wanted, Outlook, Planned, CycleState } from './cycle-values.ts';
import { clear, speaking, type Spoken } from './dispatch/interlocks.ts';
import { freshMemory, limitsOf } from './dispatch/limits.ts';
import type { DispatchMemory, PlantView } from './dispatch/types.ts';
import { SET_POINT_UNDER_LIMIT_K, wishNow } from './dispatch/wishes.ts';
import type { Estimator, IceEstimate } from './estimation/types.ts';
import type { Forecaster } from './forecasting/forecaster.ts';
import type { ClearedCommand } from './order.ts';
import { planProblem } from './planning/build.ts';
import { fallBack } from './planning/fallback.ts';
import { solvePlan } from './planning/plan.ts';
import type { Reading } from './points.ts';
import type { CycleRecord } from './record.ts';
import { priceSlots } from './tariff/prices.ts';
import { MINUTE_MS, slotStart } from './time.ts';

export interface Ticked {
  readonly state: CycleState;
  readonly order: ClearedCommand;
  readonly record: CycleRecord;
  readonly estimate: IceEstimate;
  readonly spoken: readonly Spoken[];
}

/** A solve that takes longer than this falls back: the interlocks must not wait for it. */
const SOLVE_LIMIT_MS = 2000;

export function startState(nowMs: number, dispatch: DispatchMemory | null): CycleState {
  return { dispatch: dispatch ?? freshMemory(nowMs), planned: null, order: null, lastMs: null };
}

/** The rooms are held at a set point a little under their limits, so that is what the load is forecast for. */
export function forecastSite(config: SiteConfig): SiteConfig {
  const { limitC, sleepingLimitC } = config.comfort;
  const sleeping = sleepingLimitC === null ? null : sleepingLimitC - SET_POINT_UNDER_LIMIT_K;
  return {
    ...config,
    comfort: { ...config.comfort, limitC: limitC - SET_POINT_UNDER_LIMIT_K, sleepingLimitC: sleeping },
  };
}

export function stagesOf(config: SiteConfig, estimator: Estimator, forecaster: Forecaster): Stages {
  return { config, limits: limitsOf(config), estimator, forecaster };
}

/** Makes a plan for the coming hours. Never throws for want of a solution: it falls back and says so. */
export function replan(
  stages: Stages,
  state: CycleState,
  moment: Moment,
  wanted: Wanted,
  outlook: Outlook,
): Planned {
  const { config, estimator, forecaster } = stages;
  const { planning } = config;
  const { nowMs } = moment;
  const startMs = slotStart(nowMs, planning.slotMs);
  const slots = Math.round(planning.horizonMs / planning.slotMs);
  const ice = estimator.estimate();
  const forecast = forecaster.forecast(nowMs, outlook.outdoorForecast);
  const { datedPrices, month } = outlook;
  const grid = priceSlots(config, startMs, planning.slotMs, slots, datedPrices, month);
  const inputs = planInputs(stages, state, moment, ice, forecast, grid, outlook);
  const problem = planProblem(config, inputs);
  const plan = solvePlan(problem, {
    ...(outlook.stopwatch ? { stopwatch: outlook.stopwatch, limitMs: SOLVE_LIMIT_MS } : {}),
    fallBack: (note) =>
      fallBack(
        state.planned?.plan ?? null,
        { ...timetableInputs(config, nowMs, slots), ...iceOf(ice) },
        note,
      ),
  });
  const prices = config.power.island ? islandPrices(config, moment, forecast, problem, grid) : grid;
  return { problem, prices, forecast, ...decided(wanted.strategy, plan, problem, config) };
}

/** One look at the plant: takes the readings since the last one, gives an order and the record of why. */
export function tick(
  stages: Stages,
  state: CycleState,
  moment: Moment,
  wanted: Wanted,
  readings: readonly Reading[],
): Ticked {
  const { config, limits, estimator, forecaster } = stages;
  const { nowMs, steadyMs, live, clock, brokerConnected } = moment;
  estimator.advance(nowMs, readings, state.order?.command ?? null);
  const estimate = estimator.estimate();
  const wish = wishNow(wanted.wish, nowMs);
  const request = requestOf(stages, state, moment, wish, estimate);
  const view: PlantView = {
    nowMs,
    ...(steadyMs === undefined ? {} : { steadyMs }),
    live,
    inventoryPct: estimate.inventoryPct,
    clock: clock.state,
    brokerConnected,
  };
  const { order, memory } = clear(request, view, limits, state.dispatch);
  const next = { ...state, dispatch: memory, order, lastMs: nowMs };
  const record = recordOf({
    config,
    limits,
    moment,
    estimate,
    planned: state.planned,
    request,
    order,
    wish,
    strategy: wanted.strategy,
    spanMs: spanOf(state, nowMs, config),
  });
  forecaster.observe(record);
  return { state: next, order, record, estimate, spoken: speaking(view, limits, memory) };
}

/** A record stands for the time since the last one; after a gap for two cycles at most, so that gaps stay gaps. */
function spanOf(state: CycleState, nowMs: number, config: SiteConfig): number {
  const { cycleMs } = config.planning;
  const sinceMs = state.lastMs === null ? cycleMs : nowMs - state.lastMs;
  return Math.max(0, Math.min(sinceMs, 2 * cycleMs));
}

/** Whether a new plan is due: none yet, a new slot, or the period is over. */
export function replanDue(state: CycleState, config: SiteConfig, nowMs: number): boolean {
  const { planned } = state;
  if (planned === null) return true;
  const { slotMs, replanMs } = config.planning;
  const newSlot =
    slotStart(nowMs, slotMs) > slotStart(planned.plan.madeMs, slotMs) &&
    nowMs - planned.plan.madeMs >= Math.min(replanMs, MINUTE_MS);
  const backwards = nowMs < planned.plan.madeMs;
  return newSlot || backwards || nowMs - planned.plan.madeMs >= replanMs;
}
