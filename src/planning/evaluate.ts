/** What each command is expected to cost from one state between grid points, and what one scenario makes of it. */
import { chargeAfter, idleAfter, startMoney } from './choose.ts';
import { gridMoney, settleRow } from './electricity.ts';
import { anyLoad, electricityTogether, readTogether } from './expect.ts';
import { move, readSlot } from './motion.ts';
import { slotHours } from './problem.ts';
import { valueAt, valueBetween, type Work } from './work.ts';

/** Where the plant stands; moved in place by `advance`. */
export interface Standing {
  iceKwh: number;
  batteryKwh: number;
  /** Index of the machine state. */
  machine: number;
}

/** Commands by number, as in `COMMANDS`: bit 0 charges, bit 1 discharges. */
export const CHARGES = 1;
export const DISCHARGES = 2;

/** Writes the expected money of the four commands; Infinity where one is not allowed. */
export function weigh(work: Work, t: number, c: number, at: Standing, money: Float64Array): void {
  const serves = work.problem.chiller.heatsRoom || anyLoad(work, t, c);
  for (let command = 0; command < 4; command += 1) {
    const after = machineAfter(work, t, at.machine, command);
    if (after < 0) money[command] = Infinity;
    else if (command & DISCHARGES && !serves) money[command] = money[command & CHARGES];
    else money[command] = weighOne(work, t, c, at, command, after);
  }
}

/** Machine state after a slot of a command; −1 where it is not allowed. */
export function machineAfter(work: Work, t: number, machine: number, command: number): number {
  if (!(command & CHARGES)) return idleAfter(work, t, machine);
  if (command & DISCHARGES && !work.problem.chiller.chargesWhileDischarging) return -1;
  return chargeAfter(work, t, machine);
}

function weighOne(work: Work, t: number, c: number, at: Standing, command: number, after: number): number {
  const fixed = command & CHARGES ? startMoney(work, t, at.machine) : 0;
  if (work.together && !work.island && !(command & DISCHARGES))
    return fixed + weighTogether(work, t, c, at, command, after);
  const { classes, problem, tables, slot } = work;
  const count = problem.scenarios.length;
  const hours = slotHours(problem, t);
  let money = fixed;
  for (let s = 0; s < count; s += 1) {
    const share = classes.share[t * count + s];
    if (classes.of[t * count + s] !== c || share === 0) continue;
    readSlot(problem, problem.scenarios[s], t, hours, tables, slot);
    const paid = moveOne(work, t, at, command);
    const next = valueAt(work, t + 1, classes.of[(t + 1) * count + s], after);
    money += share * (paid + valueBetween(work, next, work.outcome.iceKwh, work.settled.batteryKwh[0]));
  }
  return money;
}

function weighTogether(
  work: Work,
  t: number,
  c: number,
  at: Standing,
  command: number,
  after: number,
): number {
  const { classes, problem, slot, outcome } = work;
  const count = problem.scenarios.length;
  readTogether(work, t, c);
  moveIce(work, t, at.iceKwh, command);
  let money =
    outcome.unmetKwh * slot.unmetMoneyPerKwh +
    outcome.cutOff * problem.chiller.startMoney +
    electricityTogether(work, t, c, outcome.energyKwh);
  for (let s = 0; s < count; s += 1) {
    const share = classes.share[t * count + s];
    if (classes.of[t * count + s] !== c || share === 0) continue;
    const next = valueAt(work, t + 1, classes.of[(t + 1) * count + s], after);
    money += share * valueBetween(work, next, outcome.iceKwh, 0);
  }
  return money;
}

/** Moves the bank from ice between grid points through the slot in `work.slot`; the result is in `work.outcome`. */
export function moveIce(work: Work, t: number, iceKwh: number, command: number): void {
  const { tables, slot } = work;
  const { points, makingW, powerW, meltW, leakW, leakWPerK } = tables;
  const place = iceKwh / tables.stepKwh;
  const i = place >= points - 1 ? points - 2 : Math.floor(place);
  const part = place - i;
  const row = slot.outdoorRow * points + i;
  const melt = tables.meltRow[t] * points + i;
  const leak = between(leakW, i, part) + between(leakWPerK, i, part) * slot.surroundC;
  move(
    work.plant,
    slot,
    iceKwh,
    between(makingW, row, part) * (1 - slot.outdoorPart) +
      between(makingW, row + points, part) * slot.outdoorPart,
    between(powerW, row, part) * (1 - slot.outdoorPart) +
      between(powerW, row + points, part) * slot.outdoorPart,
    between(meltW, melt, part),
    leak,
    (command & CHARGES) !== 0,
    (command & DISCHARGES) !== 0,
    work.outcome,
  );
}

const between = (values: Float64Array, i: number, part: number): number =>
  values[i] + part * (values[i + 1] - values[i]);

/** Moves and settles; returns the money of the slot, start and demand left out. */
function moveOne(work: Work, t: number, at: Standing, command: number): number {
  const { slot, outcome, settled, island, problem, moved } = work;
  moveIce(work, t, at.iceKwh, command);
  const other = outcome.unmetKwh * slot.unmetMoneyPerKwh + outcome.cutOff * problem.chiller.startMoney;
  settled.batteryKwh[0] = 0;
  if (!island) return other + gridMoney(slot, outcome.energyKwh);
  moved.energyKwh[0] = outcome.energyKwh;
  moved.machineKwh[0] = outcome.machineKwh;
  settleRow(island, slot, at.batteryKwh, moved.energyKwh, moved.machineKwh, 1, settled);
  return other + settled.money[0];
}

/**
 * Lives one slot of one scenario under a command, in place. Returns its money, starts and peaks included, warm hours
 * as well; the outcome of the bank stays in `work.outcome`. A command that is not allowed becomes the nearest allowed.
 */
export function advance(work: Work, t: number, s: number, at: Standing, command: number): number {
  const { problem, tables, slot } = work;
  const done = allowed(work, t, at.machine, command);
  const after = machineAfter(work, t, at.machine, done);
  const fixed = done & CHARGES ? startMoney(work, t, at.machine) : 0;
  readSlot(problem, problem.scenarios[s], t, slotHours(problem, t), tables, slot);
  const money = fixed + moveOne(work, t, at, done);
  at.iceKwh = work.outcome.iceKwh;
  at.batteryKwh = work.settled.batteryKwh[0];
  at.machine = after;
  return money;
}

/** The command itself, or the nearest that the machine allows: delivery is kept before the machine is. */
function allowed(work: Work, t: number, machine: number, command: number): number {
  if (machineAfter(work, t, machine, command) >= 0) return command;
  const other = command ^ CHARGES;
  return machineAfter(work, t, machine, other) >= 0 ? other : other & CHARGES;
}

/** The cheapest command; among equals the one with the least to do, and no change of the machine. */
export function cheapest(money: Float64Array, chillerOn: boolean): number {
  let best = chillerOn && money[1] < Infinity ? 1 : 0;
  if (!(money[best] < Infinity)) best = money.indexOf(Math.min(...money));
  for (let command = 0; command < 4; command += 1) {
    if (money[command] < money[best] - 1e-9) best = command;
  }
  return best;
}
