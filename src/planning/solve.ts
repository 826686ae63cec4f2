/** Sets up a solve, finds what ice left at the end is worth, and runs the recursion back to now. */
import { batteryGrid, levelKwh } from './battery-grid.ts';
import { classify } from './classes.ts';
import { demandMoney, islandOf } from './electricity.ts';
import { chooseBest } from './choose.ts';
import { expectClass } from './expect.ts';
import { valueAt, type Work } from './work.ts';
import { machineStates } from './machine-states.ts';
import { newOutcome, newSlot } from './motion.ts';
import { holdingMoney } from './holding.ts';
import { slotHours, type PlanProblem, type PlanScenario } from './problem.ts';
import { partFrom } from './part.ts';
import { stepped } from './stepped.ts';
import { buildTables, meltTable, rowOf, type Tables } from './tables.ts';

export interface SolveOptions {
  /** Points of the ice grid. */
  readonly points?: number;
  /** Points of the battery grid, on an island. */
  readonly batteryPoints?: number;
  /** Classes of weather that the plan tells apart. */
  readonly classes?: number;
  /** What a kWh of ice is worth at the end, money; without it the plan finds out, see `setEnd`. */
  readonly endMoneyPerKwh?: number;
  /** Milliseconds since any fixed instant; with `limitMs` it ends a solve that takes too long. */
  readonly stopwatch?: () => number;
  readonly limitMs?: number;
}

/** A solve that ran out of its time. */
export class TooSlow extends Error {}

export function createWork(
  problem: PlanProblem,
  options: SolveOptions,
  tables: Tables,
  classes: number,
): Work {
  const { slots, chiller, slotMs, power } = problem;
  const island = power.kind === 'island' ? islandOf(power) : null;
  const states = machineStates(chiller, slotMs, power.kind === 'grid' && power.demand !== null);
  const battery = batteryGrid(island, options.batteryPoints ?? 7);
  const cells = tables.points * battery.points;
  const work: Work = {
    problem,
    tables,
    classes: classify(problem, classes),
    states,
    plant: { ...problem, capacityKwh: problem.plant.capacityKwh, directCooling: chiller.directCooling },
    island,
    battery,
    cells,
    value: new Float64Array((slots + 1) * Math.max(1, classes) * states.count * cells),
    expected: new Float64Array(2 * states.count * cells),
    holding: holdingMoney(problem, tables),
    peakMoney: new Float64Array(slots),
    mayStart: new Uint8Array(slots).fill(1),
    mayRun: new Uint8Array(slots).fill(1),
    moved: {
      low: new Int32Array(tables.points),
      part: new Float64Array(tables.points),
      energyKwh: new Float64Array(tables.points),
      machineKwh: new Float64Array(tables.points),
      money: new Float64Array(tables.points),
    },
    together: !chiller.heatsRoom,
    ownPower: problem.scenarios.some((s) => Array.from(s.panelW).some((w) => w > 0)),
    mixed: new Float64Array(states.count * cells),
    slot: newSlot(),
    outcome: newOutcome(),
    settled: { batteryKwh: new Float64Array(tables.points), money: new Float64Array(tables.points) },
  };
  limits(work);
  return work;
}

/** Peaks, inverter and outdoor limits of each slot, at the mean of the scenarios and half the inventory. */
function limits(work: Work): void {
  const { problem, tables } = work;
  const { power, chiller } = problem;
  const half = Math.floor(tables.points / 2);
  for (let t = 0; t < problem.slots; t += 1) {
    let outdoorC = 0;
    problem.scenarios.forEach((s, k) => (outdoorC += work.classes.weight[k] * s.outdoorC[t]));
    const machineW = tables.powerW[Math.round(rowOf(tables, outdoorC)) * tables.points + half];
    work.peakMoney[t] = demandMoney(problem, t, machineW);
    if (outdoorC > chiller.mostOutdoorC) work.mayRun[t] = 0;
    if (power.kind !== 'island') continue;
    const left = power.inverterW - power.houseW[t];
    if (!(machineW <= left)) work.mayRun[t] = 0;
    if (!(Math.max(machineW, chiller.startW) <= left)) work.mayStart[t] = 0;
  }
}

/** Cells of a single scenario's ice grid over all its steps, and the most points that such a grid has. */
const SINGLE_CELLS = 80_000;
const MOST_POINTS = 3841;

/**
 * Points of the ice grid. Between points the value is linear, which blurs the cliff where the ice just suffices. The
 * spread of many scenarios blurs it more than the grid does; a single one, whose best plan ends on the very edge, needs
 * a fine grid to show it, and can afford one.
 */
function pointsFor({ power, scenarios, slots }: PlanProblem): number {
  if (power.kind === 'island') return scenarios.length >= 8 ? 31 : 61;
  if (scenarios.length >= 8) return 61;
  if (scenarios.length > 1) return 241;
  return Math.min(MOST_POINTS, Math.max(241, Math.floor(SINGLE_CELLS / slots)));
}

/** Solves to the value of every state at every step. Throws `TooSlow` past its limit. */
export function solve(given: PlanProblem, options: SolveOptions = {}): Work {
  const problem = stepped(given);
  const tables = buildTables(problem, options.points ?? pointsFor(problem));
  const work = createWork(problem, options, tables, options.classes ?? 4);
  if (options.endMoneyPerKwh === undefined) setEnd(work, given, options);
  else setEndWorth(work, options.endMoneyPerKwh);
  backward(work, options);
  return work;
}

function backward(work: Work, options: SolveOptions): void {
  const { stopwatch, limitMs } = options;
  const until = stopwatch && limitMs !== undefined ? stopwatch() + limitMs : Infinity;
  for (let t = work.problem.slots - 1; t >= 0; t -= 1) {
    if (stopwatch && stopwatch() > until) throw new TooSlow();
    for (let c = 0; c < (t === 0 ? 1 : work.classes.most); c += 1) {
      expectClass(work, t, c);
      chooseBest(work, t, c);
    }
  }
}

function setEndWorth(work: Work, moneyPerKwh: number): void {
  const from = valueAt(work, work.problem.slots, 0, 0);
  const { points, stepKwh } = work.tables;
  for (let k = from; k < work.value.length; k += 1)
    work.value[k] = -moneyPerKwh * stepKwh * ((k - from) % points);
}

const DAY_SLOTS_MS = 86_400_000;
/** Scenarios that stand for all in the tail, and rounds until its value settles. */
const TAIL_SCENARIOS = 4;
const TAIL_ROUNDS = 2;

/**
 * What ice is worth at the end: the last day is lived again and again from there, and the value at its beginning
 * becomes the value at its end, but for a constant (relative value iteration, White 1963). It starts from the
 * cheapest that ice can be made for, up to a day's need.
 */
function setEnd(work: Work, given: PlanProblem, options: SolveOptions): void {
  const { states, cells, classes } = work;
  const daySlots = Math.min(given.slots, Math.round(DAY_SLOTS_MS / given.slotMs));
  const day = stepped(lastDay(given, given.slots - daySlots), 0);
  const tables = { ...work.tables, ...meltTable(day, work.tables) };
  const tail = createWork(day, options, tables, 1);
  const size = states.count * cells;
  const end = tail.value.subarray(day.slots * size);
  end.set(firstGuess(tail));
  for (let round = 0; round < TAIL_ROUNDS; round += 1) {
    backward(tail, options);
    const base = tail.value[0];
    for (let k = 0; k < size; k += 1) end[k] = tail.value[k] - base;
  }
  for (let c = 0; c < classes.most; c += 1) work.value.set(end, valueAt(work, work.problem.slots, c, 0));
}

/** A few scenarios stand for the last day. */
function lastDay(problem: PlanProblem, from: number): PlanProblem {
  const scenarios = spread(problem.scenarios, from, problem.slots).map((s) => ({ ...s, weight: 1 }));
  return partFrom({ ...problem, scenarios }, from);
}

/** A few scenarios evenly over the ranks of the last day's load. */
function spread(scenarios: readonly PlanScenario[], from: number, to: number): PlanScenario[] {
  const load = (s: PlanScenario): number => {
    let sum = 0;
    for (let t = from; t < to; t += 1) sum += s.loadW[t];
    return sum;
  };
  const ranked = scenarios.map((s) => ({ s, load: load(s) })).toSorted((a, b) => a.load - b.load);
  const count = Math.min(TAIL_SCENARIOS, ranked.length);
  return Array.from({ length: count }, (_, k) => ranked[Math.floor(((k + 0.5) * ranked.length) / count)].s);
}

/** Cheapest money for a kWh of ice in a day, up to the day's mean need; the battery at its wear. */
function firstGuess(tail: Work): Float64Array {
  const { problem, tables, states, cells } = tail;
  const { power, scenarios } = problem;
  const perIce = tables.powerW[0] / Math.max(1, tables.makingW[0]);
  const buy = power.kind === 'grid' ? Math.min(...Array.from(power.buy)) : (tail.island?.wear ?? 0);
  let needKwh = 0;
  for (let t = 0; t < problem.slots; t += 1) {
    for (const s of scenarios) needKwh += (s.loadW[t] * slotHours(problem, t)) / 1000 / scenarios.length;
  }
  return Float64Array.from({ length: states.count * cells }, (_, k) => {
    const cell = k % cells;
    const ice = (cell % tables.points) * tables.stepKwh;
    const battery = levelKwh(tail.battery, Math.floor(cell / tables.points));
    return -Math.max(0, buy) * perIce * Math.min(ice, needKwh) - (tail.island?.wear ?? 0) * battery;
  });
}
