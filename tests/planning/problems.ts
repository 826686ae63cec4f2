/** Small plan problems with plain tables for a plant. */
import type { PlanPlant, PlanProblem, PlanScenario } from '../../src/planning/problem.ts';

export const HOUR_MS = 3_600_000;

export const every = (slots: number, value: (t: number) => number): Float64Array =>
  Float64Array.from({ length: slots }, (_, t) => value(t));

export function scenario(slots: number, parts: Partial<PlanScenario> = {}): PlanScenario {
  return {
    weight: 1,
    outdoorC: every(slots, () => 25),
    loadW: every(slots, () => 0),
    panelW: every(slots, () => 0),
    warmKhPerKwh: 4,
    ...parts,
  };
}

/** A plant with constant figures, no leak, no limit. */
export function plant(parts: Partial<PlanPlant> = {}): PlanPlant {
  const capacityKwh = parts.capacityKwh ?? 12;
  return {
    capacityKwh,
    inventoryPct: (iceKwh) => (100 * iceKwh) / capacityKwh,
    meltLimitW: () => 1e6,
    leakW: () => 0,
    operate: () => ({ iceMakingW: 1000, powerW: 500 }),
    ...parts,
  };
}

type Parts = Partial<Omit<PlanProblem, 'chiller'>> & { chiller?: Partial<PlanProblem['chiller']> };

export function problem(slots: number, parts: Parts = {}): PlanProblem {
  return {
    nowMs: Date.UTC(2026, 6, 1, 12),
    slotMs: HOUR_MS / 4,
    slots,
    zone: 'Europe/Madrid',
    currency: 'EUR',
    units: 'SI',
    iceKwh: 2,
    iceLowKwh: parts.iceKwh ?? 2,
    iceHighKwh: parts.iceKwh ?? 2,
    roomC: null,
    homeNow: false,
    chillerOn: false,
    chillerSinceMs: null,
    scenarios: [scenario(slots)],
    power: grid(slots, () => 0.2),
    plant: plant(),
    pumpW: 0,
    fanW: 0,
    limitC: every(slots, () => 26),
    surroundC: every(slots, () => 22),
    warmHourMoney: 0.5,
    reserveKwh: 0,
    ...parts,
    chiller: {
      minOnMs: 0,
      minOffMs: 0,
      startMoney: 0,
      startW: 0,
      mostOutdoorC: 50,
      heatsRoom: false,
      directCooling: false,
      chargesWhileDischarging: true,
      ...parts.chiller,
    },
  };
}

export function grid(slots: number, buy: (t: number) => number): PlanProblem['power'] {
  return {
    kind: 'grid',
    buy: every(slots, buy),
    sell: every(slots, () => 0),
    houseW: every(slots, () => 0),
    demand: null,
  };
}
