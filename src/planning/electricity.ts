/**
 * What the electricity of a slot costs. On a grid: own surplus first, at what it would have fetched, the rest at the
 * price. On an island the battery is a state of its own: sun that would be curtailed is free, then the battery at its
 * wear, then the generator at its fuel, where it may run.
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
  readonly generatorW: number;
  readonly fuel: number;
}

export interface Settled {
  batteryKwh: number;
  money: number;
}

/**
 * Money for each kWh that the cooling plant takes where no source is left. Not a price but a wall: far above any fuel
 * or warm hour, so that a plan goes through it only where a minimum run forces it to.
 */
const NO_SOURCE = 20;

export function islandOf(power: IslandPower): Island {
  const { battery, generator } = power;
  return {
    capacityKwh: battery?.capacityKwh ?? 0,
    floorKwh: battery?.floorKwh ?? 0,
    wear: battery?.wearMoneyPerKwh ?? 0,
    mostChargeW: battery?.mostChargeW ?? 0,
    mostDischargeW: battery?.mostDischargeW ?? 0,
    generatorW: generator?.powerW ?? 0,
    fuel: generator?.moneyPerKwh ?? 0,
  };
}

/** Settles one slot on an island: house first, then the cooling plant. The floor holds for both. */
export function settleIsland(
  island: Island,
  slot: Slot,
  batteryKwh: number,
  energyKwh: number,
  out: Settled,
): void {
  const kWh = slot.hours / 1000;
  const balance = (slot.panelW - slot.houseW) * kWh - energyKwh;
  if (balance >= 0) {
    const taken = Math.min(balance, island.mostChargeW * kWh, island.capacityKwh - batteryKwh);
    out.batteryKwh = batteryKwh + Math.max(0, taken);
    out.money = 0;
    return;
  }
  const given = Math.min(-balance, island.mostDischargeW * kWh, Math.max(0, batteryKwh - island.floorKwh));
  const wanting = -balance - given;
  const made = slot.generator ? Math.min(wanting, island.generatorW * kWh) : 0;
  const missing = Math.min(wanting - made, energyKwh);
  out.batteryKwh = batteryKwh - given;
  out.money = given * island.wear + made * island.fuel + missing * NO_SOURCE;
}

/** Money that raising the month's peak by running the machine in a slot costs each night that is left. */
export function demandMoney(problem: PlanProblem, t: number, machineW: number): number {
  const demand = problem.power.kind === 'grid' ? problem.power.demand : null;
  if (!demand || !demand.measured[t]) return 0;
  const overW = problem.power.houseW[t] + machineW - demand.peakSoFarW;
  return overW > 0 ? ((overW / 1000) * demand.moneyPerKw) / Math.max(1, demand.nightsLeft) : 0;
}
