/**
 * What the electricity of a slot costs. On a grid: own surplus first, at what it would have fetched, the rest at the
 * price. On an island the battery is a state of its own: sun that would be curtailed is free, then the battery at its
 * wear and losses; the generator's fuel is paid for by what has emptied the battery.
 */
import type { IslandPower, PlanProblem } from './problem.ts';
import type { Slot } from './motion.ts';

export function gridMoney(slot: Slot, energyKwh: number): number {
  const ownW = slot.panelW - slot.houseW;
  const ownKwh = ownW > 0 ? (ownW * slot.hours) / 1000 : 0;
  return energyKwh <= ownKwh ? energyKwh * slot.sell : ownKwh * slot.sell + (energyKwh - ownKwh) * slot.buy;
}

/** A battery with its sources; without a battery its capacity is nothing. */
export interface Island {
  readonly capacityKwh: number;
  readonly floorKwh: number;
  readonly wear: number;
  readonly mostChargeW: number;
  readonly mostDischargeW: number;
  /** Part of the energy that one way through the battery leaves. */
  readonly oneWay: number;
  readonly generatorW: number;
  readonly fuel: number;
  /** What ice out of sun that would be lost is taken to be worth beyond the forecast, for each kWh of electricity. */
  readonly lostSunMoneyPerKwh: number;
  readonly startMoney: number;
  readonly leastRunHours: number;
  readonly startsBelowKwh: number;
  readonly stopsAtKwh: number;
}

/** What became of the battery and what was paid, at each of a row of ice levels. */
export interface Settled {
  readonly batteryKwh: Float64Array;
  readonly money: Float64Array;
}

/**
 * Money for each kWh that the ice machine wants and no source is left for. Not a price but a wall: far above any fuel
 * or warm hour, so that a plan goes through it only where a minimum run forces it to.
 */
const NO_SOURCE = 20;
/**
 * Sun that would be curtailed is worth nothing else, and a forecast is never sure: it goes to ice first, at this part of
 * what the same kWh out of the battery would cost (a judgement: enough to pay for a start, too little to waste one).
 */
const LOST_SUN_PART = 0.5;
/** Money for each kWh that a dark house goes without: a few times any fuel (a judgement, no source). */
const DARK_HOUSE = 3;

export function islandOf(power: IslandPower): Island {
  const { battery, generator } = power;
  return {
    capacityKwh: battery?.capacityKwh ?? 0,
    floorKwh: battery?.floorKwh ?? 0,
    wear: battery?.wearMoneyPerKwh ?? 0,
    mostChargeW: battery?.mostChargeW ?? 0,
    mostDischargeW: battery?.mostDischargeW ?? 0,
    oneWay: Math.sqrt(battery?.roundTrip ?? 1),
    generatorW: generator?.powerW ?? 0,
    fuel: generator?.moneyPerKwh ?? 0,
    lostSunMoneyPerKwh:
      LOST_SUN_PART * Math.max(battery?.wearMoneyPerKwh ?? 0, (generator?.moneyPerKwh ?? 0) / 10),
    startMoney: generator?.startMoney ?? 0,
    leastRunHours: (generator?.leastRunMs ?? 0) / 3_600_000,
    startsBelowKwh: battery ? (generator?.startsBelowKwh ?? 0) : 0,
    stopsAtKwh: battery ? (generator?.stopsAtKwh ?? 0) : 0,
  };
}

/**
 * Settles one slot on an island from one charge of the battery, for a row of `count` moves of the bank: house, pump and
 * fan first, then the ice machine. Ice never takes the battery below its floor; the others do, and a battery that has
 * come too low calls the generator, whatever took it there.
 */
export function settleRow(
  island: Island,
  slot: Slot,
  fromKwh: number,
  energyKwh: Float64Array,
  machineKwh: Float64Array,
  count: number,
  out: Settled,
): void {
  const { capacityKwh, floorKwh, oneWay, wear, startsBelowKwh } = island;
  const kWh = slot.hours / 1000;
  const spareKwh = (slot.panelW - slot.houseW) * kWh;
  const mostInKwh = Math.max(0, Math.min(island.mostChargeW * kWh, (capacityKwh - fromKwh) / oneWay));
  const mostOutKwh = island.mostDischargeW * kWh;
  const aboveFloorKwh = (fromKwh - floorKwh) * oneWay;
  const otherwiseLostKwh = Math.max(0, spareKwh - mostInKwh);
  for (let i = 0; i < count; i += 1) {
    const balance = spareKwh - energyKwh[i];
    let toKwh = fromKwh;
    let paid = 0;
    let dark = 0;
    let lacking = 0;
    if (balance >= 0) {
      toKwh += (balance < mostInKwh ? balance : mostInKwh) * oneWay;
      paid = -island.lostSunMoneyPerKwh * Math.min(machineKwh[i], otherwiseLostKwh);
    } else {
      const machine = -balance < machineKwh[i] ? -balance : machineKwh[i];
      const house = -balance - machine;
      const forHouse = Math.min(house, mostOutKwh, fromKwh * oneWay);
      const forMachine = Math.max(0, Math.min(machine, mostOutKwh - forHouse, aboveFloorKwh - forHouse));
      const drawn = (forHouse + forMachine) / oneWay;
      toKwh = Math.max(0, fromKwh - drawn);
      dark = house - forHouse;
      lacking = machine - forMachine;
      paid = drawn * wear + dark * DARK_HOUSE + lacking * NO_SOURCE;
    }
    out.batteryKwh[i] = toKwh;
    out.money[i] = paid;
    if (slot.generator && (toKwh < startsBelowKwh || (dark + lacking > 0 && !(capacityKwh > 0))))
      runGenerator(island, slot.hours, dark, lacking, i, out);
  }
}

/**
 * A generator that was called runs its shortest run at least, and until the battery is where it is stopped. All that it
 * makes is counted in the slot that calls it, so a run needs no state of its own.
 */
function runGenerator(
  island: Island,
  hours: number,
  darkKwh: number,
  lackingKwh: number,
  i: number,
  out: Settled,
): void {
  const { generatorW, oneWay, capacityKwh } = island;
  const mostKwh = (generatorW * hours) / 1000;
  const forHouse = Math.min(darkKwh, mostKwh);
  const forMachine = Math.min(lackingKwh, mostKwh - forHouse);
  const leastKwh = (generatorW * Math.max(0, island.leastRunHours - hours)) / 1000;
  const toStopKwh = (island.stopsAtKwh - out.batteryKwh[i]) / oneWay;
  const roomKwh = (capacityKwh - out.batteryKwh[i]) / oneWay;
  const storedKwh = Math.max(0, Math.min(roomKwh, Math.max(toStopKwh, leastKwh)));
  out.batteryKwh[i] += storedKwh * oneWay;
  const made = forHouse + forMachine + storedKwh;
  out.money[i] += made * island.fuel + island.startMoney - forHouse * DARK_HOUSE - forMachine * NO_SOURCE;
}

/** Money that raising the month's peak by running the machine in a slot costs each night that is left. */
export function demandMoney(problem: PlanProblem, t: number, machineW: number): number {
  const demand = problem.power.kind === 'grid' ? problem.power.demand : null;
  if (!demand || !demand.measured[t]) return 0;
  const overW = problem.power.houseW[t] + machineW - demand.peakSoFarW;
  return overW > 0 ? ((overW / 1000) * demand.moneyPerKw) / Math.max(1, demand.nightsLeft) : 0;
}
