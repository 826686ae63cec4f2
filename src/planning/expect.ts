/**
 * Stochastic dynamic programming (Bellman 1957), backward over slots. The state is ice on hand × battery × machine ×
 * class of weather; the value is expected money from here to the end, linear between grid points.
 *
 * Here: what each command is expected to cost from every state of a class. Within a class every scenario that is
 * served is moved on its own and lands in its own class of the next slot, so the expectation keeps the scenarios' own
 * spread and order in time, while the command is chosen for the class as a whole.
 */
import { levelKwh, levelOf } from './battery-grid.ts';
import { gridMoney, settleRow, type Island } from './electricity.ts';
import { move, readSlot } from './motion.ts';
import { slotHours } from './problem.ts';
import { valueAt, type Work } from './work.ts';

/** Fills `expected` for a class at a slot. */
export function expectClass(work: Work, t: number, c: number): void {
  const { expected, states, cells } = work;
  expected.fill(0);
  if (work.together) {
    if (work.island) sweepGroups(work, work.island, t, c);
    else sweepTogether(work, t, c);
    if (anyLoad(work, t, c)) sweepMembers(work, t, c, true);
    else expected.copyWithin(states.count * cells, 0, states.count * cells);
  } else {
    sweepMembers(work, t, c, false);
    if (work.problem.chiller.heatsRoom || anyLoad(work, t, c)) sweepMembers(work, t, c, true);
    else expected.copyWithin(states.count * cells, 0, states.count * cells);
  }
}

export function anyLoad(work: Work, t: number, c: number): boolean {
  const { classes, problem } = work;
  const count = problem.scenarios.length;
  for (let s = 0; s < count; s += 1) {
    if (classes.of[t * count + s] === c && problem.scenarios[s].loadW[t] > 0) return true;
  }
  return false;
}

/**
 * Without delivery the members of a class differ only in how well the machine makes ice; they are moved together at
 * their mean outdoor temperature, into the mixture of the classes that they go to. Their money stays their own.
 */
function sweepTogether(work: Work, t: number, c: number): void {
  readTogether(work, t, c);
  mixValues(work, t, c);
  for (const charge of [false, true]) {
    if (charge && !work.mayRun[t]) continue;
    moveAll(work, t, charge, false);
    payTogether(work, t, c);
    add(work, 1, charge, 0, work.mixed, 0);
  }
}

/**
 * The same on an island, where members must be apart as far as they go to different classes: their sun is the mean of
 * those that go together, and the battery takes it.
 */
function sweepGroups(work: Work, island: Island, t: number, c: number): void {
  for (let next = 0; next < work.classes.most; next += 1) {
    const chance = readTogether(work, t, c, next);
    if (chance === 0) continue;
    const to = valueAt(work, t + 1, next, 0);
    for (const charge of [false, true]) {
      if (charge && !work.mayRun[t]) continue;
      moveAll(work, t, charge, false);
      settleAndAdd(work, island, chance, charge, 0, to);
    }
  }
}

/**
 * Mean circumstances of a class, or of those of it that go to class `next`; the unmet load is priced member by member.
 * Returns their part of the class.
 */
export function readTogether(work: Work, t: number, c: number, next: number | null = null): number {
  const { classes, problem, slot, tables } = work;
  const count = problem.scenarios.length;
  const hours = slotHours(problem, t);
  let chance = 0;
  let row = 0;
  let unmet = 0;
  let panelW = 0;
  for (let s = 0; s < count; s += 1) {
    if (classes.of[t * count + s] !== c) continue;
    if (next !== null && classes.of[(t + 1) * count + s] !== next) continue;
    const share = classes.share[t * count + s];
    readSlot(problem, problem.scenarios[s], t, hours, tables, slot);
    chance += share;
    row += share * (slot.outdoorRow + slot.outdoorPart);
    unmet += share * slot.loadW * slot.unmetMoneyPerKwh;
    panelW += share * slot.panelW;
  }
  if (chance === 0) return 0;
  row /= chance;
  slot.outdoorRow = Math.min(Math.floor(row), tables.outdoorRows - 2);
  slot.outdoorPart = row - slot.outdoorRow;
  slot.panelW = panelW / chance;
  slot.loadW = unmet / chance;
  slot.unmetMoneyPerKwh = 1;
  return chance;
}

function mixValues(work: Work, t: number, c: number): void {
  const { classes, problem, value, mixed } = work;
  const count = problem.scenarios.length;
  mixed.fill(0);
  for (let next = 0; next < classes.most; next += 1) {
    let chance = 0;
    for (let s = 0; s < count; s += 1) {
      const goes = classes.of[t * count + s] === c && classes.of[(t + 1) * count + s] === next;
      if (goes) chance += classes.share[t * count + s];
    }
    if (chance === 0) continue;
    const from = valueAt(work, t + 1, next, 0);
    for (let k = 0; k < mixed.length; k += 1) mixed[k] += chance * value[from + k];
  }
}

/** Expected money for the electricity of a common move: own surplus is each member's own. */
function payTogether(work: Work, t: number, c: number): void {
  const { moved, tables } = work;
  for (let i = 0; i < tables.points; i += 1)
    moved.money[i] += electricityTogether(work, t, c, moved.energyKwh[i]);
}

export function electricityTogether(work: Work, t: number, c: number, energyKwh: number): number {
  const { classes, problem, slot } = work;
  if (!work.ownPower) return gridMoney(slot, energyKwh);
  const count = problem.scenarios.length;
  let money = 0;
  for (let s = 0; s < count; s += 1) {
    if (classes.of[t * count + s] !== c) continue;
    slot.panelW = problem.scenarios[s].panelW[t];
    money += classes.share[t * count + s] * gridMoney(slot, energyKwh);
  }
  return money;
}

/** Moves every member of a class on its own, with or without delivery. */
function sweepMembers(work: Work, t: number, c: number, discharge: boolean): void {
  const { classes, problem, tables, slot } = work;
  const count = problem.scenarios.length;
  const hours = slotHours(problem, t);
  const shift = discharge ? work.states.count * work.cells : 0;
  for (let s = 0; s < count; s += 1) {
    const share = classes.share[t * count + s];
    if (classes.of[t * count + s] !== c || share === 0) continue;
    readSlot(problem, problem.scenarios[s], t, hours, tables, slot);
    const next = valueAt(work, t + 1, classes.of[(t + 1) * count + s], 0);
    for (const charge of [false, true]) {
      if (charge && !work.mayRun[t]) continue;
      moveAll(work, t, charge, discharge);
      if (work.island) {
        settleAndAdd(work, work.island, share, charge, shift, next);
        continue;
      }
      payAll(work);
      add(work, share, charge, shift, work.value, next);
    }
  }
}

function payAll(work: Work): void {
  const { moved, slot, tables } = work;
  for (let i = 0; i < tables.points; i += 1) moved.money[i] += gridMoney(slot, moved.energyKwh[i]);
}

/** Adds what was moved to `expected`, for every machine state that the command can lead to. */
function add(
  work: Work,
  share: number,
  charge: boolean,
  shift: number,
  value: Float64Array,
  next: number,
): void {
  const { states, cells } = work;
  const first = charge ? states.off : 0;
  const last = charge ? states.plain : states.off;
  for (let peak = 0; peak < states.count; peak += states.plain) {
    for (let m = peak + first; m < peak + last; m += 1)
      addGrid(work, share, value, next + m * cells, shift + m * cells);
  }
}

/**
 * Moves every ice level of the grid through a slot; what becomes of it goes to `work.moved`. A machine that is kept
 * from running stops, and counting the start that will follow keeps a plan from calling it on for hours to save that.
 */
function moveAll(work: Work, t: number, charge: boolean, discharge: boolean): void {
  const { tables, plant, slot, outcome, moved } = work;
  const { points, makingW, powerW, meltW, leakW, leakWPerK, stepKwh } = tables;
  const row = slot.outdoorRow * points;
  const part = slot.outdoorPart;
  const melt = tables.meltRow[t] * points;
  const price = slot.unmetMoneyPerKwh;
  const startMoney = work.problem.chiller.startMoney;
  for (let i = 0; i < points; i += 1) {
    const at = row + i;
    const making = makingW[at] + part * (makingW[at + points] - makingW[at]);
    const power = powerW[at] + part * (powerW[at + points] - powerW[at]);
    const leak = leakW[i] + leakWPerK[i] * slot.surroundC;
    move(plant, slot, i * stepKwh, making, power, meltW[melt + i], leak, charge, discharge, outcome);
    const place = outcome.iceKwh / stepKwh;
    const low = place >= points - 1 ? points - 2 : Math.floor(place);
    moved.low[i] = low;
    moved.part[i] = place - low;
    moved.energyKwh[i] = outcome.energyKwh;
    moved.machineKwh[i] = outcome.machineKwh;
    moved.money[i] = outcome.unmetKwh * price + outcome.cutOff * startMoney;
  }
}

function addGrid(work: Work, share: number, value: Float64Array, from: number, to: number): void {
  const { expected, moved, cells } = work;
  const { low, part, money } = moved;
  for (let i = 0; i < cells; i += 1) {
    const k = from + low[i];
    expected[to + i] += share * (money[i] + value[k] + part[i] * (value[k + 1] - value[k]));
  }
}

/**
 * Settles what was moved at every battery level, and adds it for the machine states `first` to below `last`. One pass:
 * the corners of the bilinear value are the same for all of them.
 */
function settleAndAdd(
  work: Work,
  island: Island,
  share: number,
  charge: boolean,
  shift: number,
  next: number,
): void {
  const { moved, settled, slot, tables, battery, cells, expected, value, states } = work;
  const { low, part, energyKwh, machineKwh, money } = moved;
  const { points } = tables;
  const first = (charge ? states.off : 0) * cells;
  const end = (charge ? states.plain : states.off) * cells;
  const most = Math.max(0, battery.points - 2);
  // Without a battery there is no level above; its part is nothing then.
  const up = battery.points > 1 ? points : 0;
  for (let b = 0; b < battery.points; b += 1) {
    settleRow(island, slot, levelKwh(battery, b), energyKwh, machineKwh, points, settled);
    for (let i = 0; i < points; i += 1) {
      const place = levelOf(battery, settled.batteryKwh[i]);
      const level = place >= most ? most : Math.floor(place);
      const above = place - level;
      const paid = money[i] + settled.money[i];
      const icePart = part[i];
      const corner = next + level * points + low[i];
      const to = shift + b * points + i;
      for (let m = first; m < end; m += cells) {
        const k = corner + m;
        const lower = value[k] + icePart * (value[k + 1] - value[k]);
        const upper = value[k + up] + icePart * (value[k + up + 1] - value[k + up]);
        expected[to + m] += share * (paid + lower + above * (upper - lower));
      }
    }
  }
}
