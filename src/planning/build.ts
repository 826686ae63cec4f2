/** A plan problem from the site file and what the other stages know now. */
import type { SiteConfig } from '../config.ts';
import { bankLimits } from '../plant/bank.ts';
import { iceMachine } from '../plant/ice-machine.ts';
import { localMinuteOfDay } from '../time.ts';
import type {
  BatteryTerms,
  ChillerTerms,
  DemandTerms,
  GeneratorTerms,
  GridPower,
  IslandPower,
  PlanPlant,
  PlanProblem,
  PlanScenario,
} from './problem.ts';

const DAY_MS = 86_400_000;

/** A scenario with the sun on level ground, W/m², where it is known. */
export type SunlitScenario = PlanScenario & { readonly sunWPerM2?: ArrayLike<number> };

export interface PlanInputs {
  readonly nowMs: number;
  readonly iceOnHandKwh: number;
  readonly lowKwh: number;
  readonly highKwh: number;
  /** One value a slot, from the slot that holds `nowMs`. */
  readonly scenarios: readonly SunlitScenario[];
  readonly prices: readonly { readonly buy: number; readonly sell: number }[];
  readonly roomC: number | null;
  readonly homeNow: boolean;
  readonly chillerOn: boolean;
  readonly chillerSinceMs: number | null;
  /** Air round the bank as measured; null where there is no such point. */
  readonly surroundC: number | null;
  /** Power of the house, the cooling plant left out: a mean, or one value a slot; null when unknown. */
  readonly houseW: number | ArrayLike<number> | null;
  readonly batteryPct: number | null;
  /** Terms and state of the demand charge; null where there is none. */
  readonly demand: { readonly price: number; readonly peakKw: number; readonly untilMs: number } | null;
  /** What the estimate has learned of the plant. */
  readonly learned?: LearnedPlant;
}

/** What the plant has shown of itself, as factors over its site file; 1 (and 0) where nothing is known. */
export interface LearnedPlant {
  readonly meltGain?: number;
  readonly heatLeakWPerK?: number;
  /** Electrical power of the machine, and ice made for each unit of it. */
  readonly powerGain?: number;
  readonly copGain?: number;
  /** Logarithm of the latter for each 10 K of outdoor air above the rating, and for a full inventory over an empty one. */
  readonly copByOutdoor?: number;
  readonly copByInventory?: number;
}

export function planProblem(config: SiteConfig, inputs: PlanInputs): PlanProblem {
  const { planning, comfort, delivery, site } = config;
  const wanted = Math.round(planning.horizonMs / planning.slotMs);
  const reach = inputs.scenarios.map((s) => Math.min(s.outdoorC.length, s.loadW.length));
  const grid = config.power.island === null;
  const slots = Math.min(wanted, ...reach, grid ? inputs.prices.length : wanted);
  const startMs = Math.floor(inputs.nowMs / planning.slotMs) * planning.slotMs;
  const bySlot = (value: (atMs: number, t: number) => number): Float64Array =>
    Float64Array.from({ length: Math.max(0, slots) }, (_, t) => value(startMs + t * planning.slotMs, t));
  const scenarios = withPanels(config, inputs.scenarios);
  const limitC = bySlot((atMs) => limitAt(config, atMs));
  return {
    nowMs: inputs.nowMs,
    slotMs: planning.slotMs,
    slots,
    zone: site.zone,
    currency: site.currency,
    units: site.units === 'IP' ? 'IP' : 'SI',
    iceKwh: inputs.iceOnHandKwh,
    iceLowKwh: inputs.lowKwh,
    iceHighKwh: inputs.highKwh,
    roomC: inputs.roomC,
    homeNow: inputs.homeNow,
    chillerOn: inputs.chillerOn,
    chillerSinceMs: inputs.chillerSinceMs,
    scenarios,
    power: grid ? gridPower(config, inputs, bySlot) : islandPower(config, inputs, bySlot),
    plant: plantOf(config, inputs),
    chiller: chillerTerms(config),
    pumpW: delivery.pumpW,
    fanW: delivery.fanW,
    limitC,
    surroundC: bySlot((_, t) => surroundAt(config, inputs, limitC, t)),
    warmHourMoney: comfort.warmHourPrice,
    reserveKwh: planning.reserveKwh,
  };
}

/** Soiling, wiring, inverter and warm cells together, until the panels themselves have shown it (common practice). */
const PANEL_PART = 0.78;

/**
 * Panels that no forecast knows yet give what the sun on level ground would make them give: a plan that believed in no
 * sun at all would empty the battery on its first day.
 */
function withPanels(config: SiteConfig, scenarios: readonly SunlitScenario[]): readonly PlanScenario[] {
  const panelsW = config.power.island?.panelsW ?? 0;
  const known = scenarios.some((s) => Array.from(s.panelW).some((w) => w > 0));
  if (known || !(panelsW > 0)) return scenarios;
  return scenarios.map((s) => ({
    ...s,
    panelW: Float64Array.from(s.sunWPerM2 ?? s.panelW, (sun) =>
      s.sunWPerM2 ? (sun / 1000) * panelsW * PANEL_PART : 0,
    ),
  }));
}

type BySlot = (value: (atMs: number, t: number) => number) => Float64Array;

function plantOf(config: SiteConfig, inputs: PlanInputs): PlanPlant {
  const machine = iceMachine(config);
  const { powerGain = 1, copGain = 1, copByOutdoor = 0, copByInventory = 0 } = inputs.learned ?? {};
  const { ratedOutdoorC } = config.chiller;
  return {
    ...bankLimits(config, inputs.learned),
    operate: (outdoorC, inventoryPct) => {
      const nominal = machine.operate(outdoorC, inventoryPct);
      const slope = (copByOutdoor * (outdoorC - ratedOutdoorC)) / 10 + (copByInventory * inventoryPct) / 100;
      const cop = copGain * Math.exp(slope);
      return { powerW: nominal.powerW * powerGain, iceMakingW: nominal.iceMakingW * powerGain * cop };
    },
  };
}

function chillerTerms(config: SiteConfig): ChillerTerms {
  const { chiller, bank } = config;
  return {
    minOnMs: chiller.minOnMs,
    minOffMs: chiller.minOffMs,
    startMoney: chiller.startCost,
    startW: chiller.startW,
    mostOutdoorC: chiller.mostOutdoorC,
    heatsRoom: chiller.rejects === 'cooled-room',
    directCooling: chiller.directCooling,
    // An internal-melt coil carries either cold brine or melt brine, unless the machine can serve the load past it.
    chargesWhileDischarging: bank.form !== 'ice-on-coil-internal' || chiller.directCooling,
  };
}

/** Comfort limit at an instant: sleeping hours may have their own. */
function limitAt(config: SiteConfig, atMs: number): number {
  const { limitC, sleepingLimitC, sleepingFrom, sleepingTo } = config.comfort;
  const asleep = within(config.site.zone, atMs, sleepingFrom, sleepingTo);
  return asleep && sleepingLimitC !== null ? sleepingLimitC : limitC;
}

function within(zone: string, atMs: number, from: string, to: string): boolean {
  const minute = localMinuteOfDay(zone, atMs);
  const [a, b] = [minutesOf(from), minutesOf(to)];
  return a < b ? minute >= a && minute < b : minute >= a || minute < b;
}

const minutesOf = (clock: string): number => Number(clock.slice(0, 2)) * 60 + Number(clock.slice(3, 5));

/** Air round the bank: as measured; else outdoors it is the weather, indoors the room at its limit. */
function surroundAt(config: SiteConfig, inputs: PlanInputs, limitC: Float64Array, t: number): number {
  const { stands, surroundC } = config.bank;
  if (stands === 'outdoors') return meanOutdoorC(inputs.scenarios, t);
  if (inputs.surroundC !== null) return inputs.surroundC;
  return stands === 'indoors' ? limitC[t] : surroundC;
}

function meanOutdoorC(scenarios: readonly PlanScenario[], t: number): number {
  let sum = 0;
  let weight = 0;
  for (const s of scenarios) {
    sum += s.weight * s.outdoorC[t];
    weight += s.weight;
  }
  return sum / weight;
}

function gridPower(config: SiteConfig, inputs: PlanInputs, bySlot: BySlot): GridPower {
  return {
    kind: 'grid',
    buy: bySlot((_, t) => inputs.prices[t].buy),
    sell: bySlot((_, t) => inputs.prices[t].sell),
    houseW: bySlot((_, t) => houseAt(inputs, t) ?? 0),
    demand: demandTerms(config, inputs, bySlot),
  };
}

function houseAt({ houseW }: PlanInputs, t: number): number | null {
  return typeof houseW === 'object' ? (houseW?.[t] ?? null) : houseW;
}

function demandTerms(config: SiteConfig, inputs: PlanInputs, bySlot: BySlot): DemandTerms | null {
  const terms = config.power.tariff?.demand;
  const { demand, nowMs } = inputs;
  if (!terms || !demand) return null;
  const zone = config.power.tariff?.zone ?? config.site.zone;
  const allDay = terms.from === terms.to;
  // A new month starts afresh; its peak is left to the plans made in it.
  const measured = bySlot((atMs) =>
    atMs < demand.untilMs && (allDay || within(zone, atMs, terms.from, terms.to)) ? 1 : 0,
  );
  const ownPeakW = Math.max(0, ...measured.map((counts, t) => counts * (houseAt(inputs, t) ?? 0)));
  return {
    moneyPerKw: demand.price,
    // What the house will reach by itself is paid whatever the plant does.
    peakSoFarW: Math.max(demand.peakKw * 1000, ownPeakW),
    measured,
    nightsLeft: Math.max(1, Math.ceil((demand.untilMs - nowMs) / DAY_MS)),
  };
}

function islandPower(config: SiteConfig, inputs: PlanInputs, bySlot: BySlot): IslandPower {
  const island = config.power.island;
  return {
    kind: 'island',
    houseW: bySlot((_, t) => houseAt(inputs, t) ?? island?.houseW ?? 0),
    battery: batteryTerms(config, inputs.batteryPct),
    generator: generatorTerms(config, bySlot),
    inverterW: island?.inverterW ?? 0,
  };
}

function batteryTerms({ power }: SiteConfig, batteryPct: number | null): BatteryTerms | null {
  const battery = power.island?.battery;
  if (!battery) return null;
  return {
    capacityKwh: battery.capacityKwh,
    floorKwh: (battery.capacityKwh * battery.floorPct) / 100,
    // A battery that is not heard counts as at its floor: nothing is taken from it.
    nowKwh: (battery.capacityKwh * (batteryPct ?? battery.floorPct)) / 100,
    wearMoneyPerKwh: battery.wear,
    mostChargeW: battery.mostChargeW,
    mostDischargeW: battery.mostDischargeW,
    roundTrip: battery.roundTripPct / 100,
  };
}

function generatorTerms({ site, power }: SiteConfig, bySlot: BySlot): GeneratorTerms | null {
  const generator = power.island?.generator;
  if (!generator) return null;
  const capacityKwh = power.island?.battery?.capacityKwh ?? 0;
  const quiet = (atMs: number): boolean => within(site.zone, atMs, generator.quietFrom, generator.quietTo);
  return {
    powerW: generator.powerW,
    moneyPerKwh: generator.price,
    startMoney: generator.startMoney,
    quiet: bySlot((atMs) => (quiet(atMs) || quiet(atMs + Math.max(0, generator.minRunMs - 1)) ? 1 : 0)),
    leastRunMs: generator.minRunMs,
    startsBelowKwh: (capacityKwh * generator.startsBelowPct) / 100,
    stopsAtKwh: (capacityKwh * generator.stopsAtPct) / 100,
  };
}
