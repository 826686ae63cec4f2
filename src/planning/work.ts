/** Everything that one solve reads and writes. */
import type { Classes } from './classes.ts';
import { levelOf, type BatteryGrid } from './battery-grid.ts';
import type { Island, Settled } from './electricity.ts';
import type { MachineStates } from './machine-states.ts';
import type { Outcome, Plant, Slot } from './motion.ts';
import type { PlanProblem } from './problem.ts';
import type { Tables } from './tables.ts';

/** Made once for a solve; nothing is allocated inside its loops. */
export interface Work {
  readonly problem: PlanProblem;
  readonly tables: Tables;
  readonly classes: Classes;
  readonly states: MachineStates;
  readonly plant: Plant;
  /** Null on a grid. */
  readonly island: Island | null;
  readonly battery: BatteryGrid;
  /** Ice points × battery points. */
  readonly cells: number;
  /** Value at [((slot × classes + class) × states + state) × cells + battery × points + ice]; slots + 1 of them. */
  readonly value: Float64Array;
  /** Expected money of a command, its start and demand left out: [(discharge × states + next state) × cells + cell]. */
  readonly expected: Float64Array;
  /** Money for holding this ice at the start of a slot: [slot × points + ice]; reserve and melt-out. */
  readonly holding: Float64Array;
  /** For each slot: a raised peak, whether the machine may start, whether it may run. */
  readonly peakMoney: Float64Array;
  readonly mayStart: Uint8Array;
  readonly mayRun: Uint8Array;
  /** Scratch of one sweep over the ice grid, and of what it last added. */
  readonly moved: {
    readonly low: Int32Array;
    readonly part: Float64Array;
    readonly energyKwh: Float64Array;
    readonly machineKwh: Float64Array;
    readonly money: Float64Array;
  };
  /** Whether members of a class may be moved together where nothing is delivered; and whether there is own power. */
  readonly together: boolean;
  readonly ownPower: boolean;
  /** Values of the next slot, mixed over the classes that a class goes to: [state × cells + cell]. */
  readonly mixed: Float64Array;
  readonly slot: Slot;
  readonly outcome: Outcome;
  readonly settled: Settled;
}

/** Offset of a class and state in `value` at a slot. */
export function valueAt(work: Work, t: number, c: number, state: number): number {
  return ((t * work.classes.most + c) * work.states.count + state) * work.cells;
}

/** Value between grid points, from the offset of a class and state. */
export function valueBetween(work: Work, offset: number, iceKwh: number, batteryKwh: number): number {
  const { tables } = work;
  const place = iceKwh / tables.stepKwh;
  const low = place >= tables.points - 1 ? tables.points - 2 : Math.floor(place);
  return plane(work, offset, low, place - low, batteryKwh);
}

/** Bilinear in ice (cell `low` and the part beyond it) and battery. */
function plane(work: Work, offset: number, low: number, part: number, batteryKwh: number): number {
  const { value } = work;
  const below = offset + low;
  const { points } = work.battery;
  if (points === 1) return value[below] + part * (value[below + 1] - value[below]);
  const place = levelOf(work.battery, batteryKwh);
  const b = place >= points - 1 ? points - 2 : Math.floor(place);
  const k = below + b * work.tables.points;
  const above = k + work.tables.points;
  const lower = value[k] + part * (value[k + 1] - value[k]);
  const upper = value[above] + part * (value[above + 1] - value[above]);
  return lower + (place - b) * (upper - lower);
}
