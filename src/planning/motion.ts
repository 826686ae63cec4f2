/**
 * What one slot does to the bank, the rooms and the meter, under one command. These are the only formulas of the plan;
 * the grid sweep and the forward simulation both call them.
 */
import type { PlanProblem, PlanScenario } from './problem.ts';
import { rowOf, type Tables } from './tables.ts';

/** The circumstances of one slot in one scenario. */
export interface Slot {
  hours: number;
  loadW: number;
  /** What a wet coil takes over what it would take dry. */
  wetFactor: number;
  panelW: number;
  houseW: number;
  buy: number;
  sell: number;
  /** 1 where the generator may run. */
  generator: number;
  /** Whether heat that the condenser gives off in the room has to be taken out again. */
  heated: boolean;
  /** Money for each kWh of cooling that stays undelivered. */
  unmetMoneyPerKwh: number;
  surroundC: number;
  /** Row below in the machine table, and how far to the next. */
  outdoorRow: number;
  outdoorPart: number;
  /** Whether the machine may run at all. */
  mayCharge: boolean;
}

/** Fixed figures of the plant. */
export interface Plant {
  readonly capacityKwh: number;
  readonly pumpW: number;
  readonly fanW: number;
  readonly directCooling: boolean;
}

/** What a slot under a command comes to; written anew by every call. */
export interface Outcome {
  iceKwh: number;
  /** Electricity of the cooling plant, and the ice machine's part of it. */
  energyKwh: number;
  machineKwh: number;
  unmetKwh: number;
  deliveredKwh: number;
  /** Share of the slot that the machine was kept from running by a full bank or by hot outdoor air. */
  cutOff: number;
}

export const newOutcome = (): Outcome => ({
  iceKwh: 0,
  energyKwh: 0,
  machineKwh: 0,
  unmetKwh: 0,
  deliveredKwh: 0,
  cutOff: 0,
});

export const newSlot = (): Slot => ({
  hours: 0,
  loadW: 0,
  wetFactor: 1,
  panelW: 0,
  houseW: 0,
  buy: 0,
  sell: 0,
  generator: 0,
  heated: false,
  unmetMoneyPerKwh: 0,
  surroundC: 0,
  outdoorRow: 0,
  outdoorPart: 0,
  mayCharge: true,
});

/**
 * Moves the bank through a slot. `makingW`, `powerW`, `meltW` (what ice and a dry coil can take out of the room) and
 * `leakW` hold at the ice at the start of the slot. Pump and fan run for the share of the slot that the delivery needs;
 * the pump's heat goes to the bank with it, the fan's is part of the load. A machine that fills the bank stops there.
 */
export function move(
  plant: Plant,
  slot: Slot,
  iceKwh: number,
  makingW: number,
  powerW: number,
  meltW: number,
  leakW: number,
  charge: boolean,
  discharge: boolean,
  out: Outcome,
): void {
  const kWh = slot.hours / 1000;
  const runs = charge && slot.mayCharge;
  let ice = Math.min(plant.capacityKwh, Math.max(0, iceKwh - leakW * kWh));
  let made = runs ? makingW * kWh : 0;
  let machine = runs ? powerW * kWh : 0;
  let pumping = 0;
  const needKwh = (runs && slot.heated ? slot.loadW + makingW + powerW : slot.loadW) * kWh;
  let net = 0;
  if (discharge && needKwh > 0) {
    const limitW = runs && plant.directCooling && makingW > meltW ? makingW : meltW;
    const mostKwh = limitW * slot.wetFactor * kWh;
    if (mostKwh > 0) {
      const available = ice + made;
      let duty = needKwh < mostKwh ? needKwh / mostKwh : 1;
      const drawKwh = mostKwh + plant.pumpW * kWh;
      if (duty * drawKwh > available) duty = available / drawKwh;
      net = duty * mostKwh;
      ice -= duty * drawKwh;
      pumping = duty * (plant.pumpW + plant.fanW) * kWh;
    }
  }
  const room = plant.capacityKwh - ice;
  out.cutOff = charge && !runs ? 1 : 0;
  if (made > room) {
    out.cutOff = 1 - room / made;
    machine -= powerW * kWh * out.cutOff;
    made = room;
  }
  // what is drawn to the last drop may round to just below nothing
  out.iceKwh = Math.max(0, ice + made);
  out.energyKwh = machine + pumping;
  out.machineKwh = machine;
  out.unmetKwh = needKwh - net;
  out.deliveredKwh = net;
}

/** Fills the circumstances of a slot in a scenario, prices and table rows included. */
export function readSlot(
  problem: PlanProblem,
  scenario: PlanScenario,
  t: number,
  hours: number,
  tables: Tables,
  slot: Slot,
): void {
  const { power, chiller } = problem;
  const outdoorC = scenario.outdoorC[t];
  slot.hours = hours;
  slot.loadW = Math.max(0, scenario.loadW[t]);
  slot.wetFactor = wetFactor(slot.loadW, scenario.latentW?.[t] ?? 0);
  slot.panelW = scenario.panelW[t];
  slot.houseW = power.houseW[t];
  slot.buy = power.kind === 'grid' ? power.buy[t] : 0;
  slot.sell = power.kind === 'grid' ? power.sell[t] : 0;
  slot.generator = power.kind === 'island' && power.generator && !power.generator.quiet[t] ? 1 : 0;
  slot.heated = chiller.heatsRoom && (slot.loadW > 0 || outdoorC >= problem.limitC[t]);
  slot.unmetMoneyPerKwh = problem.warmHourMoney * scenario.warmKhPerKwh;
  slot.surroundC = problem.surroundC[t];
  slot.mayCharge = outdoorC <= chiller.mostOutdoorC;
  const at = rowOf(tables, outdoorC);
  slot.outdoorRow = Math.min(Math.floor(at), tables.outdoorRows - 2);
  slot.outdoorPart = at - slot.outdoorRow;
}

/** A coil that dries the air as well takes more heat in all; held below what fan coils do (no source). */
const MOST_WET = 2;

const wetFactor = (loadW: number, latentW: number): number =>
  latentW > 0 ? Math.min(MOST_WET, loadW / Math.max(1, loadW - latentW)) : 1;
