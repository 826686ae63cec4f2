/**
 * Stochastic dynamic programming (Bellman 1957), backward over slots. The state is ice on hand × battery × machine ×
 * class of weather; the value is expected money from here to the end, linear between grid points.
 *
 * Here: what each command is expected to cost from every state of a class. Within a class every scenario that is
 * served is moved on its own and lands in its own class of the next slot, so the expectation keeps the scenarios' own
 * spread and order in time, while the command is chosen for the class as a whole.
 */
import { gridMoney, settleIsland, type Island } from './electricity.ts';
import { move, readSlot } from './motion.ts';
import { slotHours } from './problem.ts';
import { valueAt, type Work } from './work.ts';

/** Fills `expected` for a class at a slot. */
export function expectClass(work: Work, t: number, c: number): void {
  const { expected, states, cells } = work;
  expected.fill(0);
  if (work.together) {
    sweepTogether(work, t, c);
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

/** Mean circumstances of a class; the unmet load is priced member by member. */
export function readTogether(work: Work, t: number, c: number): void {
  const { classes, problem, slot, tables } = work;
  const count = problem.scenarios.length;
  const hours = slotHours(problem, t);
  let row = 0;
  let unmet = 0;
  for (let s = 0; s < count; s += 1) {
    if (classes.of[t * count + s] !== c) continue;
    const share = classes.share[t * count + s];
    readSlot(problem, problem.scenarios[s], t, hours, tables, slot);
    row += share * (slot.outdoorRow + slot.outdoorPart);
    unmet += share * slot.loadW * slot.unmetMoneyPerKwh;
  }
  slot.outdoorRow = Math.min(Math.floor(row), tables.outdoorRows - 2);
  slot.outdoorPart = row - slot.outdoorRow;
  slot.loadW = unmet;
  slot.unmetMoneyPerKwh = 1;
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
      if (work.island) settleAll(work, work.island);
      else payAll(work);
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
  const { states, cells, island } = work;
  const first = charge ? states.off : 0;
  const last = charge ? states.plain : states.off;
  for (let peak = 0; peak < states.count; peak += states.plain) {
    for (let m = peak + first; m < peak + last; m += 1) {
      if (island) addIsland(work, share, value, next + m * cells, shift + m * cells);
      else addGrid(work, share, value, next + m * cells, shift + m * cells);
    }
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

/** Settles what was moved at every battery level: corner cell and parts of the bilinear value, and the money. */
function settleAll(work: Work, island: Island): void {
  const { moved, settled, slot, tables, onBattery, batteryPoints, batteryStepKwh } = work;
  const { points } = tables;
  for (let b = 0; b < batteryPoints; b += 1) {
    for (let i = 0; i < points; i += 1) {
      settleIsland(island, slot, b * batteryStepKwh, moved.energyKwh[i], settled);
      const place = batteryPoints > 1 ? settled.batteryKwh / batteryStepKwh : 0;
      const low = Math.max(0, Math.min(Math.floor(place), batteryPoints - 2));
      const cell = b * points + i;
      onBattery.corner[cell] = low * points + moved.low[i];
      onBattery.part[cell] = place - low;
      onBattery.money[cell] = moved.money[i] + settled.money;
    }
  }
}

function addIsland(work: Work, share: number, value: Float64Array, from: number, to: number): void {
  const { expected, moved, onBattery, tables, cells } = work;
  const { corner, part, money } = onBattery;
  const { points } = tables;
  // Without a battery there is no level above; its part is nothing then.
  const up = work.batteryPoints > 1 ? points : 0;
  for (let base = 0; base < cells; base += points) {
    for (let i = 0; i < points; i += 1) {
      const cell = base + i;
      const k = from + corner[cell];
      const icePart = moved.part[i];
      const lower = value[k] + icePart * (value[k + 1] - value[k]);
      const upper = value[k + up] + icePart * (value[k + up + 1] - value[k + up]);
      expected[to + cell] += share * (money[cell] + lower + part[cell] * (upper - lower));
    }
  }
}
