/** What goes into a plan and what is kept of it. */
import type { SiteConfig } from './config.ts';
import type { Strategy } from './commands.ts';
import {
  isHome,
  type CycleState,
  type Moment,
  type Outlook,
  type Planned,
  type Stages,
} from './cycle-values.ts';
import type { IceEstimate } from './estimation/types.ts';
import type { Forecast } from './forecasting/forecaster.ts';
import type { LearnedPlant, PlanInputs } from './planning/build.ts';
import { asides, explain, explainSimple } from './planning/explain.ts';
import { followed } from './planning/followed.ts';
import type { Plan } from './planning/plan.ts';
import type { PlanProblem } from './planning/problem.ts';
import { simpleCommand } from './planning/strategies.ts';
import { meanOverRooms, valueOf } from './points.ts';
import type { PlanRecord } from './record.ts';
import { islandSlots } from './tariff/island.ts';
import type { PriceSlot } from './tariff/prices.ts';
import { slotStart } from './time.ts';

export function decided(
  strategy: Strategy,
  plan: Plan,
  problem: PlanProblem,
  config: SiteConfig,
): Pick<Planned, 'plan' | 'strategy' | 'command' | 'reason'> {
  if (strategy === 'planned')
    return { plan, strategy, command: plan.command, reason: explain(plan, problem) };
  const { timetable } = config.planning;
  const command = simpleCommand(strategy, problem, timetable);
  const reason = explainSimple(strategy, command, problem);
  return { plan: followed(strategy, problem, timetable, plan), strategy, command, reason };
}

export function planInputs(
  { config }: Stages,
  state: CycleState,
  { nowMs, live }: Moment,
  ice: IceEstimate,
  forecast: Forecast,
  prices: readonly PriceSlot[],
  { demand, houseW }: Pick<Outlook, 'demand' | 'houseW'>,
): PlanInputs {
  const usual = houseW && prices.map((slot) => houseW(slot.startMs + config.planning.slotMs / 2));
  return {
    nowMs,
    iceOnHandKwh: ice.iceOnHandKwh,
    lowKwh: ice.lowKwh,
    highKwh: ice.highKwh,
    scenarios: forecast.scenarios,
    prices,
    roomC: meanOverRooms(live, 'room-temperature'),
    homeNow: isHome(config, live, nowMs),
    chillerOn: state.dispatch.chillerOn,
    chillerSinceMs: state.dispatch.chillerSinceMs,
    surroundC: valueOf(live, 'bank-surround'),
    houseW: usual ?? valueOf(live, 'house-power'),
    batteryPct: valueOf(live, 'battery-charge'),
    demand,
    learned: learnedPlant(config, ice),
  };
}

/** A figure so far off its site file is a fault of plant or estimate, and no figure to plan with. */
const FURTHEST = 2;

function learnedPlant({ bank }: SiteConfig, { learned, heatLeakWPerK }: IceEstimate): LearnedPlant {
  const figure = (name: string, unknown: number): number =>
    learned.find((one) => one.name === name)?.value ?? unknown;
  const gain = (value: number): number => Math.min(FURTHEST, Math.max(1 / FURTHEST, value));
  return {
    heatLeakWPerK,
    meltGain: gain(figure('melt-conductance', bank.meltWPerK) / bank.meltWPerK),
    powerGain: gain(figure('machine-power-factor', 1)),
    copGain: gain(figure('charging-factor', 1)),
    copByOutdoor: figure('charging-by-outdoor', 0),
    copByInventory: figure('charging-by-inventory', 0),
  };
}

export const iceOf = (ice: IceEstimate) => ({
  iceKwh: ice.iceOnHandKwh,
  iceLowKwh: ice.lowKwh,
  iceHighKwh: ice.highKwh,
});

export const timetableInputs = (config: SiteConfig, nowMs: number, slots: number) => ({
  nowMs,
  slotMs: config.planning.slotMs,
  slots,
  zone: config.site.zone,
  timetable: config.planning.timetable,
});

/** On an island an hour's price is what the plant's own kilowatt-hour takes from sun, battery or generator. */
export function islandPrices(
  config: SiteConfig,
  { live }: Moment,
  forecast: Forecast,
  problem: PlanProblem,
  slots: readonly PriceSlot[],
): PriceSlot[] {
  const { scenarios, slotMs } = forecast;
  const mean = (t: number): number =>
    scenarios.reduce((sum, s) => sum + s.weight * s.panelW[t], 0) / totalWeight(forecast);
  const priced = islandSlots(config, {
    startMs: slots[0].startMs,
    slotMs,
    panelW: Float64Array.from({ length: problem.slots }, (_, t) => mean(t)),
    houseW: problem.power.houseW,
    batteryPct: valueOf(live, 'battery-charge'),
  });
  return priced.map((slot, t) => ({
    ...slots[t],
    buy: slot.freeW > 0 ? 0 : (slot.buy ?? slots[t].buy),
    period: slot.period,
  }));
}

const totalWeight = ({ scenarios }: Forecast): number => scenarios.reduce((sum, s) => sum + s.weight, 0);

/** The plan as it is stored and shown. */
export function planRecordOf({ plan, problem, forecast, strategy, reason, prices }: Planned): PlanRecord {
  const byStart = new Map(prices.map((slot) => [slot.startMs, slot.buy]));
  const steps = plan.steps.map((step) => ({
    ...step,
    priceMoneyPerKwh: byStart.get(slotStart(step.startMs, plan.slotMs)) ?? step.priceMoneyPerKwh,
  }));
  return {
    madeMs: plan.madeMs,
    outcome: plan.outcome,
    strategy,
    slotMs: plan.slotMs,
    steps,
    expectedCostMoney: plan.expectedCostMoney ?? 0,
    worthOfIceMoneyPerKwh: plan.worthOfIceMoneyPerKwh ?? 0,
    waitCostMoney: plan.waitCostMoney ?? 0,
    reason,
    asides: asides(plan, problem),
    forecastKnows: forecast.knows,
  };
}
