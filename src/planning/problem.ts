/**
 * What a plan is made from: plain numbers for each slot and scenario, and a plant reduced to five questions.
 * Slots are counted from the slot that holds `nowMs`; the first one is already partly over.
 */
import type { DisplayUnits } from '../units.ts';

/** One way in which the weather may turn out; every series has one value a slot. */
export interface PlanScenario {
  readonly weight: number;
  readonly outdoorC: ArrayLike<number>;
  /** Cooling that the coil must give to hold the comfort limit, W: sensible, moisture and the fan's own heat. */
  readonly loadW: ArrayLike<number>;
  /** The part of it that is moisture; none when left out. */
  readonly latentW?: ArrayLike<number>;
  /** Power of the own panels, W. */
  readonly panelW: ArrayLike<number>;
  /** Degree-hours above the limit for each kWh of cooling that is not delivered. */
  readonly warmKhPerKwh: number;
}

/** The plant as the plan sees it. Ice on hand is in kWh of cooling, machine figures in W. */
export interface PlanPlant {
  readonly capacityKwh: number;
  inventoryPct(iceKwh: number): number;
  /** Heat that ice and coil together take out of a room at `roomC`. */
  meltLimitW(iceKwh: number, roomC: number): number;
  /** Heat that leaks into the bank; linear in the surround. */
  leakW(iceKwh: number, surroundC: number): number;
  operate(outdoorC: number, inventoryPct: number): { readonly iceMakingW: number; readonly powerW: number };
}

export interface DemandTerms {
  readonly moneyPerKw: number;
  /** Highest mean power of the month so far, or of what the house will come to by itself, W. */
  readonly peakSoFarW: number;
  /** For each slot, 1 where power is measured. */
  readonly measured: ArrayLike<number>;
  /** Nights left in the month, this one included: a peak raised now serves them all. */
  readonly nightsLeft: number;
}

export interface GridPower {
  readonly kind: 'grid';
  readonly buy: ArrayLike<number>;
  readonly sell: ArrayLike<number>;
  readonly houseW: ArrayLike<number>;
  readonly demand: DemandTerms | null;
}

export interface BatteryTerms {
  readonly capacityKwh: number;
  readonly floorKwh: number;
  readonly nowKwh: number;
  readonly wearMoneyPerKwh: number;
  readonly mostChargeW: number;
  readonly mostDischargeW: number;
  /** What comes out of what went in; half of the loss is counted on either way. */
  readonly roundTrip: number;
}

export interface GeneratorTerms {
  readonly powerW: number;
  readonly moneyPerKwh: number;
  readonly startMoney: number;
  /** For each slot, 1 where it cannot be started: it must be silent before its shortest run is over. */
  readonly quiet: ArrayLike<number>;
  readonly leastRunMs: number;
  /** Battery below which it is started, and at which it is stopped. */
  readonly startsBelowKwh: number;
  readonly stopsAtKwh: number;
}

export interface IslandPower {
  readonly kind: 'island';
  readonly houseW: ArrayLike<number>;
  readonly battery: BatteryTerms | null;
  readonly generator: GeneratorTerms | null;
  readonly inverterW: number;
}

export interface ChillerTerms {
  readonly minOnMs: number;
  readonly minOffMs: number;
  readonly startMoney: number;
  readonly startW: number;
  readonly mostOutdoorC: number;
  readonly heatsRoom: boolean;
  readonly directCooling: boolean;
  readonly chargesWhileDischarging: boolean;
}

export interface PlanProblem {
  readonly nowMs: number;
  readonly slotMs: number;
  /** Steps that the series below have values for; each is one slot long unless `spans` says otherwise. */
  readonly slots: number;
  /** Length of each step in slots and the slot that it begins with, where steps are longer than slots. */
  readonly spans?: { readonly length: Uint8Array; readonly start: Uint16Array };
  readonly zone: string;
  readonly currency: string;
  readonly units: DisplayUnits;

  readonly iceKwh: number;
  /** 90 % interval of the estimate. */
  readonly iceLowKwh: number;
  readonly iceHighKwh: number;
  readonly roomC: number | null;
  /** Whether somebody is home now: comfort counts. */
  readonly homeNow: boolean;
  readonly chillerOn: boolean;
  /** Since when it has been on or off; null when unknown. */
  readonly chillerSinceMs: number | null;

  readonly scenarios: readonly PlanScenario[];
  readonly power: GridPower | IslandPower;
  readonly plant: PlanPlant;
  readonly chiller: ChillerTerms;
  readonly pumpW: number;
  readonly fanW: number;
  /** Room temperature to hold, for each slot; sleeping hours may have their own. */
  readonly limitC: ArrayLike<number>;
  /** Air round the bank, for each slot. */
  readonly surroundC: ArrayLike<number>;
  readonly warmHourMoney: number;
  readonly reserveKwh: number;
}

/** Length of a step in slots. */
export function spanOf(problem: PlanProblem, step: number): number {
  return problem.spans ? problem.spans.length[step] : 1;
}

/** Length of a step in hours; what is left of it for the first. */
export function slotHours(problem: PlanProblem, step: number): number {
  const { nowMs, slotMs } = problem;
  if (step > 0) return (spanOf(problem, step) * slotMs) / 3_600_000;
  const left = Math.floor(nowMs / slotMs) * slotMs + slotMs - nowMs;
  return left / 3_600_000;
}

export function slotStartMs(problem: PlanProblem, step: number): number {
  if (step === 0) return problem.nowMs;
  const slot = problem.spans ? problem.spans.start[step] : step;
  return (Math.floor(problem.nowMs / problem.slotMs) + slot) * problem.slotMs;
}

const finite = (values: ArrayLike<number>, count: number): boolean => {
  if (!(values.length >= count)) return false;
  for (let i = 0; i < count; i += 1) if (!Number.isFinite(values[i])) return false;
  return true;
};

/** Names the first thing that makes a problem unsolvable; null when it is sound. */
export function faultOf(problem: PlanProblem): string | null {
  const { slots, scenarios, power } = problem;
  if (!(slots >= 1 && problem.slotMs >= 60_000)) return 'there are no slots to plan';
  if (!(scenarios.length >= 1)) return 'there is no forecast';
  if (!(problem.plant.capacityKwh > 0)) return 'the size of the bank is unknown';
  const numbers = [problem.iceKwh, problem.iceLowKwh, problem.iceHighKwh, problem.reserveKwh];
  if (!finite(numbers, 4)) return 'the ice on hand is unknown';
  if (!finite(problem.limitC, slots)) return 'the comfort limit is not known for every slot';
  if (!finite(problem.surroundC, slots)) return 'the air round the bank is not known for every slot';
  if (power.kind === 'grid' && !(finite(power.buy, slots) && finite(power.sell, slots))) {
    return 'prices do not reach to the end of the plan';
  }
  if (!finite(power.houseW, slots)) return 'the power of the house is not known for every slot';
  return scenarioFault(scenarios, slots);
}

function scenarioFault(scenarios: readonly PlanScenario[], slots: number): string | null {
  let weight = 0;
  for (const s of scenarios) {
    const whole = finite(s.outdoorC, slots) && finite(s.loadW, slots) && finite(s.panelW, slots);
    if (!whole || !(s.weight >= 0) || !(s.warmKhPerKwh >= 0)) {
      return 'the forecast has holes or does not reach to the end of the plan';
    }
    weight += s.weight;
  }
  return weight > 0 ? null : 'the forecast has no weight';
}
