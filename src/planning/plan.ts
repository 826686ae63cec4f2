/**
 * A plan has three ends: solved; or, when a solve fails or takes too long, the last plan shifted to now; or, when
 * there is none, the owner's timetable. Nothing here throws into the cycle.
 */
import { charges, commandFor, COMMANDS, type Command, type Strategy } from '../commands.ts';
import { weightedQuantile, weightedQuantiles } from '../numerics/quantile.ts';
import type { PlanOutcome, PlanStep } from '../record.ts';
import { cheapest, DISCHARGES, weigh, type Standing } from './evaluate.ts';
import {
  holdForAnHour,
  liveForward,
  machineHourKwh,
  runsOutAtSlot,
  standingNow,
  type Paths,
} from './forward.ts';
import { meltOutSlot } from './holding.ts';
import { faultOf, slotHours, slotStartMs, spanOf, type PlanProblem } from './problem.ts';
import { solve, TooSlow, type SolveOptions } from './solve.ts';
import { valueAt, valueBetween, type Work } from './work.ts';

/** What would turn the command into its opposite, where that can be said. */
export interface Flips {
  /** Price of the coming hour, money/kWh. */
  readonly priceMoneyPerKwh: number | null;
  /** Ice on hand. */
  readonly iceKwh: number | null;
}

export interface Plan {
  readonly madeMs: number;
  readonly outcome: PlanOutcome;
  readonly strategy: Strategy;
  /** Why it is not a fresh solve, in a sentence; empty when it is. */
  readonly note: string;
  readonly slotMs: number;
  readonly steps: readonly PlanStep[];
  /** Command of this slot. */
  readonly command: Command;
  readonly nextChangeMs: number | null;
  readonly worthOfIceMoneyPerKwh: number | null;
  /** What doing otherwise for an hour would cost: not making, not melting; or, on hold, making. */
  readonly waitCostMoney: number | null;
  readonly flips: Flips;
  /** Over the whole plan, by the scenarios. */
  readonly expectedCostMoney: number | null;
  readonly expectedWarmKh: number | null;
  /** When the ice runs out if no more is made: median, and one evening in ten; null beyond the plan. */
  readonly lastsUntilMs: number | null;
  readonly lastsAtLeastUntilMs: number | null;
  /** Whether a room that turns out warmer than foreseen shall be cooled: not while ice is saved for later. */
  readonly servesRooms: boolean;
  /** Whether this plan lets the bank melt out to clear up how much ice there is. */
  readonly meltsOut: boolean;
}

/** Solves, or falls back. `last` is the plan before this one. */
export function solvePlan(
  problem: PlanProblem,
  options: SolveOptions & { readonly fallBack: (note: string) => Plan },
): Plan {
  const fault = faultOf(problem);
  if (fault) return options.fallBack(`No fresh plan: ${fault}.`);
  try {
    return read(solve(problem, options));
  } catch (error) {
    const slow = error instanceof TooSlow;
    return options.fallBack(
      slow
        ? 'No fresh plan: the solve took too long.'
        : `No fresh plan: the solve failed (${String(error)}).`,
    );
  }
}

/** Reads a plan out of a finished solve. */
export function read(work: Work): Plan {
  const { problem } = work;
  const here = standingNow(work);
  const money = new Float64Array(4);
  weigh(work, 0, 0, here, money);
  if (!Number.isFinite(Math.min(...money))) throw new RangeError('the figures of the plant are not finite');
  const worth = worthOfIce(work, here);
  const serves = servesRooms(work, worth);
  const chosen = withRoomNearLimit(problem, money, cheapest(money, problem.chillerOn), serves);
  const paths = liveForward(work, chosen);
  const steps = stepsOf(work, paths);
  const other = otherwise(chosen);
  const wait = waitCost(work, here, chosen, other);
  return {
    madeMs: problem.nowMs,
    outcome: 'solved',
    strategy: 'planned',
    note: '',
    slotMs: problem.slotMs,
    steps,
    command: COMMANDS[chosen],
    nextChangeMs: steps.find((step) => step.command !== COMMANDS[chosen])?.startMs ?? null,
    worthOfIceMoneyPerKwh: worth,
    waitCostMoney: wait,
    flips: { priceMoneyPerKwh: priceFlip(work, chosen, wait), iceKwh: iceFlip(work, here, chosen) },
    expectedCostMoney: paths.expectedMoney,
    expectedWarmKh: paths.expectedWarmKh,
    ...lasting(work),
    servesRooms: serves,
    meltsOut: meltsOut(work, paths),
  };
}

/** How far under the limit a room counts as soon to be cooled. */
const NEAR_LIMIT_K = 0.5;

/** Where no cooling is foreseen in this slot but the room is at its limit, delivery is left open: the room decides. */
function withRoomNearLimit(
  problem: PlanProblem,
  money: Float64Array,
  chosen: number,
  serves: boolean,
): number {
  const near = problem.homeNow && problem.roomC !== null && problem.roomC > problem.limitC[0] - NEAR_LIMIT_K;
  return near && serves && money[chosen | DISCHARGES] < Infinity ? chosen | DISCHARGES : chosen;
}

/** Cooling nobody foresaw is worth its ice, unless the ice would save as many warm hours later. */
function servesRooms(work: Work, worthMoneyPerKwh: number): boolean {
  const { scenarios, warmHourMoney } = work.problem;
  return worthMoneyPerKwh < warmHourMoney * Math.max(LEAST_WARM_KH, ...scenarios.map((s) => s.warmKhPerKwh));
}

/** Warm hours of a kWh not delivered where the forecast, seeing no load, gives none. */
const LEAST_WARM_KH = 1;

/**
 * The command of a plan at an instant after it was made, for a room as it is then: what the step says, with delivery
 * left open where somebody is home and the room is near its limit.
 */
export function commandAt(plan: Plan, nowMs: number, roomIsNear: boolean): Command {
  const step = plan.steps.findLast((candidate) => candidate.startMs <= nowMs) ?? plan.steps[0];
  const asked = step?.command ?? 'hold';
  return roomIsNear && plan.servesRooms ? commandFor(charges(asked), true) : asked;
}

/** The opposite that a wait means: from making, not making; from melting, not melting; from hold, making. */
function otherwise(chosen: number): number {
  if (chosen & 1) return chosen & 2;
  return chosen === 2 ? 0 : 1;
}

function waitCost(work: Work, here: Standing, chosen: number, other: number): number | null {
  const money = new Float64Array(4);
  weigh(work, 0, 0, here, money);
  if (!(money[other] < Infinity)) return null;
  return Math.max(0, holdForAnHour(work, other) - money[chosen]);
}

/** Slope of the value by ice over some hundredths of the bank: narrower than that it shows the steps of the machine. */
function worthOfIce(work: Work, here: Standing): number {
  const { problem } = work;
  const half = problem.plant.capacityKwh * 0.03;
  const low = Math.max(0, here.iceKwh - half);
  const high = Math.min(problem.plant.capacityKwh, here.iceKwh + half);
  const offset = valueAt(work, 0, 0, here.machine);
  const drop =
    valueBetween(work, offset, low, here.batteryKwh) - valueBetween(work, offset, high, here.batteryKwh);
  return Math.max(0, drop / (high - low));
}

/** The price of the coming hour at which making and not making cost the same. */
function priceFlip(work: Work, chosen: number, wait: number | null): number | null {
  const { power } = work.problem;
  if (wait === null || power.kind !== 'grid' || chosen === 2) return null;
  const perKwh = wait / machineHourKwh(work);
  return chosen & 1 ? power.buy[0] + perKwh : power.buy[0] - perKwh;
}

/** The nearest ice on hand at which the machine would be told otherwise. */
function iceFlip(work: Work, here: Standing, chosen: number): number | null {
  const { tables, problem } = work;
  const money = new Float64Array(4);
  let nearest: number | null = null;
  for (let i = 0; i < tables.points; i += 1) {
    const iceKwh = i * tables.stepKwh;
    if (nearest !== null && Math.abs(iceKwh - here.iceKwh) >= Math.abs(nearest - here.iceKwh)) continue;
    weigh(work, 0, 0, { ...here, iceKwh }, money);
    if ((cheapest(money, problem.chillerOn) & 1) !== (chosen & 1)) nearest = iceKwh;
  }
  return nearest;
}

/** One for each slot; both slots of a pair carry the same, and the ice on the way from one step to the next. */
export function stepsOf(work: Work, paths: Paths): PlanStep[] {
  const { problem } = work;
  const steps = Array.from({ length: problem.slots }, (_, t) => stepOf(work, paths, t));
  return steps.flatMap((step, t) => {
    if (spanOf(problem, t) === 1) return [step];
    const next = steps[t + 1] ?? step;
    const half = (key: 'iceKwh' | 'iceLowKwh' | 'iceHighKwh'): number => (step[key] + next[key]) / 2;
    const second = { iceKwh: half('iceKwh'), iceLowKwh: half('iceLowKwh'), iceHighKwh: half('iceHighKwh') };
    return [step, { ...step, ...second, startMs: step.startMs + problem.slotMs }];
  });
}

function stepOf({ problem, classes }: Work, paths: Paths, t: number): PlanStep {
  const count = problem.scenarios.length;
  const { weight } = classes;
  const buy = problem.power.kind === 'grid' ? problem.power.buy : null;
  const ice = paths.iceKwh.subarray(t * count, (t + 1) * count);
  const outdoor = Float64Array.from(problem.scenarios, (s) => s.outdoorC[t]);
  const load = Float64Array.from(problem.scenarios, (s) => s.loadW[t]);
  const band = (values: Float64Array): number[] => weightedQuantiles(values, weight, [0.1, 0.5, 0.9]);
  const [iceLowKwh, iceKwh, iceHighKwh] = band(ice);
  const [outdoorLowC, outdoorC, outdoorHighC] = band(outdoor);
  const [loadLowW, loadW, loadHighW] = band(load);
  const commands = paths.command.subarray(t * count, (t + 1) * count);
  return {
    startMs: slotStartMs(problem, t),
    command: commonCommand(commands, weight, problem.chiller.chargesWhileDischarging),
    iceKwh,
    iceLowKwh,
    iceHighKwh,
    priceMoneyPerKwh: buy ? buy[t] : 0,
    outdoorC,
    outdoorLowC,
    outdoorHighC,
    loadW,
    loadLowW,
    loadHighW,
  };
}

/** What most of the scenarios would have the machine do, and the pump; of two that exclude each other, the likelier. */
function commonCommand(commands: Uint8Array, weight: Float64Array, both: boolean): Command {
  let charge = 0;
  let discharge = 0;
  for (let s = 0; s < commands.length; s += 1) {
    if (commands[s] & 1) charge += weight[s];
    if (commands[s] & 2) discharge += weight[s];
  }
  if (both || charge < 0.5 || discharge < 0.5) return commandFor(charge >= 0.5, discharge >= 0.5);
  return commandFor(charge > discharge, charge <= discharge);
}

function lasting(work: Work): Pick<Plan, 'lastsUntilMs' | 'lastsAtLeastUntilMs'> {
  const { problem, classes } = work;
  const { slots } = problem;
  const ends = (iceKwh: number): Float64Array =>
    Float64Array.from(problem.scenarios, (_, s) => runsOutAtSlot(work, s, iceKwh) ?? slots);
  const atSlot = (slot: number): number | null =>
    slot >= slots ? null : slotStartMs(problem, Math.floor(slot));
  return {
    lastsUntilMs: atSlot(weightedQuantile(ends(problem.iceKwh), classes.weight, 0.5)),
    lastsAtLeastUntilMs: atSlot(weightedQuantile(ends(problem.iceLowKwh), classes.weight, 0.1)),
  };
}

function meltsOut(work: Work, paths: Paths): boolean {
  const { problem, classes } = work;
  const slot = meltOutSlot(problem);
  if (slot === null) return false;
  const count = problem.scenarios.length;
  let weight = 0;
  for (let s = 0; s < count; s += 1) {
    if (problem.plant.inventoryPct(paths.iceKwh[slot * count + s]) <= 1) weight += classes.weight[s];
  }
  return weight > 0.5;
}

/** Cooling needed between two instants in each scenario, kWh. */
export function needKwh(problem: PlanProblem, fromMs: number, toMs: number): Float64Array {
  return Float64Array.from(problem.scenarios, (s) => {
    let kwh = 0;
    for (let t = 0; t < problem.slots; t += 1) {
      const start = slotStartMs(problem, t);
      if (start >= fromMs && start < toMs) kwh += (s.loadW[t] * slotHours(problem, t)) / 1000;
    }
    return kwh;
  });
}
