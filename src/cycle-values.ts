/** The values that meet in a cycle, and two small questions that several of its parts ask of them. */
import { expectedHome } from './comfort-hours.ts';
import type { SiteConfig } from './config.ts';
import type { Command, Strategy, Wish } from './commands.ts';
import type { ClockVerdict } from './dispatch/clock.ts';
import type { DispatchMemory, Limits } from './dispatch/types.ts';
import type { Estimator } from './estimation/types.ts';
import type { Forecast, Forecaster } from './forecasting/forecaster.ts';
import type { ClearedCommand } from './order.ts';
import type { Plan } from './planning/plan.ts';
import type { PlanProblem } from './planning/problem.ts';
import { valueOf, type LivePoints } from './points.ts';
import type { DatedPrice } from './tariff/dated.ts';
import type { DemandState } from './tariff/demand.ts';
import type { MonthSoFar, PriceSlot } from './tariff/prices.ts';

/** What is built once and keeps learning. */
export interface Stages {
  readonly config: SiteConfig;
  readonly limits: Limits;
  readonly estimator: Estimator;
  readonly forecaster: Forecaster;
}

/** What is known from outside at a moment. */
export interface Moment {
  readonly nowMs: number;
  /** Time that nobody sets; absent where the clock is never set. */
  readonly steadyMs?: number;
  readonly live: LivePoints;
  readonly clock: ClockVerdict;
  readonly brokerConnected: boolean;
}

/** What the owner wants. */
export interface Wanted {
  readonly wish: Wish | null;
  readonly strategy: Strategy;
}

/** What comes in for a plan beyond the plant itself. */
export interface Outlook {
  readonly outdoorForecast: readonly { readonly atMs: number; readonly temperatureC: number }[] | null;
  readonly datedPrices: readonly DatedPrice[];
  readonly demand: DemandState | null;
  /** The month's energy so far; null on an island. */
  readonly month: MonthSoFar | null;
  /** What the house usually draws at an instant, the cooling plant left out, W; null until it is learned. */
  readonly houseW: ((atMs: number) => number) | null;
  /** Milliseconds from any fixed instant, to end a solve that takes too long. */
  readonly stopwatch?: () => number;
}

/** A plan with what it was made from. */
export interface Planned {
  readonly plan: Plan;
  readonly problem: PlanProblem;
  readonly prices: readonly PriceSlot[];
  readonly forecast: Forecast;
  readonly strategy: Strategy;
  /** The strategy's command of this slot; the plan's own steps say what the following slots bring. */
  readonly command: Command;
  readonly reason: string;
}

/** What goes from one cycle to the next; plain data. */
export interface CycleState {
  readonly dispatch: DispatchMemory;
  readonly planned: Planned | null;
  readonly order: ClearedCommand | null;
  readonly lastMs: number | null;
}

/** Somebody is home: as heard, else as the site file expects. */
export function isHome(config: SiteConfig, live: LivePoints, nowMs: number): boolean {
  const heard = valueOf(live, 'occupied');
  return heard === null ? expectedHome(config.cabin, config.site.zone, nowMs) : heard === 1;
}

export function priceAt(prices: readonly PriceSlot[], nowMs: number): PriceSlot | null {
  return prices.findLast((slot) => slot.startMs <= nowMs) ?? null;
}
