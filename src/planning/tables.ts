/**
 * The plant's answers on a grid of ice on hand and outdoor temperature, asked once for each solve, so that the inner
 * loop does nothing but interpolate.
 */
import type { PlanProblem } from './problem.ts';

export interface Tables {
  /** Points of the ice grid, from empty to full. */
  readonly points: number;
  readonly stepKwh: number;
  /** Ice making and electrical power, W, at [outdoor × points + ice]; rows from `coldestC` up, see `rowOf`. */
  readonly makingW: Float64Array;
  readonly powerW: Float64Array;
  readonly coldestC: number;
  readonly outdoorRows: number;
  /** Heat that leaks in, W = leakW[ice] + leakWPerK[ice] × surround. */
  readonly leakW: Float64Array;
  readonly leakWPerK: Float64Array;
  /** Heat that ice and coil can take, W, at [room row × points + ice], and the row of each slot. */
  readonly meltW: Float64Array;
  readonly meltRow: Int32Array;
}

export function buildTables(problem: PlanProblem, points: number): Tables {
  const stepKwh = problem.plant.capacityKwh / (points - 1);
  const machine = machineTable(problem, points, stepKwh);
  const leakW = new Float64Array(points);
  const leakWPerK = new Float64Array(points);
  for (let i = 0; i < points; i += 1) {
    leakW[i] = problem.plant.leakW(i * stepKwh, 0);
    leakWPerK[i] = (problem.plant.leakW(i * stepKwh, 20) - leakW[i]) / 20;
  }
  return { points, stepKwh, ...machine, leakW, leakWPerK, ...meltTable(problem, { points, stepKwh }) };
}

/** Kelvin between rows, and inventories asked at each: machine maps are smooth, finer asks change nothing. */
const ROW_K = 2;
const INVENTORIES = 17;

function machineTable(problem: PlanProblem, points: number, stepKwh: number) {
  const [lowC, highC] = outdoorRange(problem);
  const coldestC = Math.floor(lowC);
  const outdoorRows = Math.max(2, Math.ceil((highC - coldestC) / ROW_K) + 1);
  const makingW = new Float64Array(outdoorRows * points);
  const powerW = new Float64Array(outdoorRows * points);
  const making = new Float64Array(INVENTORIES);
  const power = new Float64Array(INVENTORIES);
  for (let row = 0; row < outdoorRows; row += 1) {
    for (let k = 0; k < INVENTORIES; k += 1) {
      const at = problem.plant.operate(coldestC + row * ROW_K, (k * 100) / (INVENTORIES - 1));
      making[k] = at.iceMakingW;
      power[k] = at.powerW;
    }
    for (let i = 0; i < points; i += 1) {
      const pct = problem.plant.inventoryPct(i * stepKwh);
      makingW[row * points + i] = between(making, pct);
      powerW[row * points + i] = between(power, pct);
    }
  }
  return { makingW, powerW, coldestC, outdoorRows };
}

function between(values: Float64Array, inventoryPct: number): number {
  const at = (Math.min(Math.max(inventoryPct, 0), 100) / 100) * (INVENTORIES - 1);
  const low = Math.min(Math.floor(at), INVENTORIES - 2);
  return values[low] + (at - low) * (values[low + 1] - values[low]);
}

/** Row of an outdoor temperature, with its fraction. */
export function rowOf(tables: Pick<Tables, 'coldestC' | 'outdoorRows'>, outdoorC: number): number {
  return Math.min(Math.max((outdoorC - tables.coldestC) / ROW_K, 0), tables.outdoorRows - 1);
}

function outdoorRange(problem: PlanProblem): [number, number] {
  let low = Infinity;
  let high = -Infinity;
  for (const scenario of problem.scenarios) {
    for (let t = 0; t < problem.slots; t += 1) {
      low = Math.min(low, scenario.outdoorC[t]);
      high = Math.max(high, scenario.outdoorC[t]);
    }
  }
  return [low, high];
}

export function meltTable(problem: PlanProblem, { points, stepKwh }: Pick<Tables, 'points' | 'stepKwh'>) {
  const rooms: number[] = [];
  const meltRow = new Int32Array(problem.slots);
  for (let t = 0; t < problem.slots; t += 1) {
    const known = rooms.indexOf(problem.limitC[t]);
    meltRow[t] = known >= 0 ? known : rooms.push(problem.limitC[t]) - 1;
  }
  const meltW = new Float64Array(rooms.length * points);
  rooms.forEach((roomC, row) => {
    for (let i = 0; i < points; i += 1) {
      meltW[row * points + i] = problem.plant.meltLimitW(i * stepKwh, roomC);
    }
  });
  return { meltW, meltRow };
}
