/**
 * The few figures of a night that drift is read from. The weather is taken out as far as one night allows: COP and capacity are
 * led back to the rating's outdoor temperature, conductances are medians over steady stretches.
 */
import type { SiteConfig } from '../config.ts';
import { quantile } from '../numerics/quantile.ts';
import type { CycleRecord } from '../record.ts';
import type { FigureName, NightSheet } from './night-schema.ts';
import { energyKwh, hoursOf, meanOver, rounded, roundedOrNull, type Span } from './spans.ts';

const KELVIN = 273.15;
/** Condensing stands above outdoor air by about this much (common practice, no source). */
const PINCH_K = 12;
const WATER_W_PER_K_PER_L_MIN = 4205 / 60;
/** Fewer hours than this of a mode give no figure. */
const LEAST_HOURS = 1;
/** Under this inventory the shrinking ice itself lowers the conductance. */
const STEADY_INVENTORY_PCT = 30;
/** About half inventory, where the ice is neither thin nor thick. */
const [HALF_PCT, NEAR_HALF_PCT] = [50, 15];
/** Ice on hand below which a bank counts as having run out. */
const LEAST_ICE_KWH = 0.3;
/** Base of the degree-hours, below the comfort limit: below it a cabin needs no cooling (common practice, no source). */
const BASE_BELOW_LIMIT_K = 6;

type Figures = Record<FigureName, number | null>;

/** Carnot's COP between an evaporating temperature and condensing at an outdoor temperature. */
export function carnotAt(evaporatingC: number, outdoorC: number): number {
  return (evaporatingC + KELVIN) / (outdoorC + PINCH_K - evaporatingC);
}

function median(values: readonly number[]): number | null {
  return values.length < 5 ? null : quantile(values, 0.5);
}

export function figuresOf(site: SiteConfig, spans: readonly Span[]): Figures {
  const charging = spans.filter(
    ({ record }) => record.chargingW > 0 && (record.chillerPowerW ?? 0) > site.chiller.runningAboveW,
  );
  const flowing = spans.filter(({ record }) => record.dischargingW > 0);
  return { ...machineFigures(site, charging), ...loopFigures(site, flowing), ...houseFigures(site, spans) };
}

function machineFigures(site: SiteConfig, charging: readonly Span[]) {
  const none = {
    copAtRating: null,
    iceMakingAtRatingW: null,
    machinePowerAtRatingW: null,
    coolantBelowZeroK: null,
  };
  const hours = hoursOf(charging);
  const outdoorC = meanOver(charging, (record) => record.outdoorC);
  if (!(hours >= LEAST_HOURS) || outdoorC === null) return none;
  const madeW = (energyKwh(charging, (record) => record.chargingW) * 1000) / hours;
  const usedW = (energyKwh(charging, (record) => record.chillerPowerW) * 1000) / hours;
  const { ratedEvaporatingC, ratedOutdoorC } = site.chiller;
  const lift = carnotAt(ratedEvaporatingC, ratedOutdoorC) / carnotAt(ratedEvaporatingC, outdoorC);
  // Of the change with outdoor temperature about half falls on capacity and half on power.
  return {
    copAtRating: rounded((madeW / usedW) * lift, 4),
    iceMakingAtRatingW: rounded(madeW * Math.sqrt(lift), 2),
    machinePowerAtRatingW: rounded(usedW / Math.sqrt(lift), 2),
    // What drives the heat out of the bank: a machine that takes less leaves its coolant warmer. Thick ice asks for
    // colder coolant, so only about half inventory counts.
    coolantBelowZeroK: roundedOrNull(
      median(charging.flatMap(({ record }) => depressionAtHalf(record) ?? [])),
      3,
    ),
  };
}

function depressionAtHalf(record: CycleRecord): number | null {
  const { coolantSupplyC, inventoryPct } = record;
  return coolantSupplyC === null || !(Math.abs(inventoryPct - HALF_PCT) < NEAR_HALF_PCT)
    ? null
    : -coolantSupplyC;
}

function loopFigures(site: SiteConfig, flowing: readonly Span[]) {
  const enough = hoursOf(flowing) >= LEAST_HOURS;
  const of = (pick: (record: CycleRecord) => number | null): number | null =>
    enough ? roundedOrNull(median(flowing.flatMap(({ record }) => pick(record) ?? [])), 3) : null;
  const flowOf = (record: CycleRecord): number | null =>
    'loop-flow' in site.points ? record.loopFlowLPerMin : site.delivery.flowLPerMin;
  return {
    meltWPerK: of((record) => meltConductance(record, flowOf(record))),
    coilNtu: of(coilTransferUnits),
    flowLPerMin: 'loop-flow' in site.points ? of((record) => record.loopFlowLPerMin) : null,
    pumpPowerW: of((record) => record.pumpPowerW),
  };
}

/** From entering and leaving water against ice at 0 °C: UA = ṁ c ln(entering/leaving), effectiveness of one phase change. */
function meltConductance(record: CycleRecord, flow: number | null): number | null {
  const { enteringWaterC: entering, leavingWaterC: leaving } = record;
  if (entering === null || leaving === null || flow === null) return null;
  if (!(leaving > 0.1 && entering > leaving && flow > 0 && record.inventoryPct > STEADY_INVENTORY_PCT))
    return null;
  return flow * WATER_W_PER_K_PER_L_MIN * Math.log(entering / leaving);
}

/**
 * Transfer units of the fan coil from three temperatures alone: what share of the way from leaving water to room air the
 * water comes back warmed. A fouled coil lowers it, a weaker flow raises it; no flow meter and no learned figure is in it.
 */
function coilTransferUnits(record: CycleRecord): number | null {
  const { enteringWaterC: entering, leavingWaterC: leaving, roomC } = record;
  if (entering === null || leaving === null || roomC === null) return null;
  const share = (entering - leaving) / (roomC - leaving);
  return roomC - leaving > 8 && share > 0.02 && share < 0.98 ? -Math.log(1 - share) : null;
}

function houseFigures(site: SiteConfig, spans: readonly Span[]) {
  const last = spans.at(-1);
  const baseC = site.comfort.limitC - BASE_BELOW_LIMIT_K;
  const degreeHours = spans.reduce(
    (sum, { record, hours }) => sum + Math.max(0, (record.outdoorC ?? baseC) - baseC) * hours,
    0,
  );
  const outKwh = energyKwh(spans, (record) => record.dischargingW);
  // On a night that ran out of ice the load was what there was, not what was wanted.
  const ranOut = spans.some(({ record }) => record.iceOnHandKwh < LEAST_ICE_KWH);
  return {
    heatLeakWPerK: last === undefined ? null : rounded(last.record.heatLeakWPerK, 4),
    loadPerDegree: !ranOut && degreeHours > 20 && outKwh > 0.5 ? rounded(outKwh / degreeHours, 5) : null,
  };
}

export function conditionsOf(spans: readonly Span[]): NightSheet['conditions'] {
  const charging = spans.filter(({ record }) => record.chargingW > 0);
  const flowing = spans.filter(({ record }) => record.dischargingW > 0);
  return {
    chargeOutdoorC: roundedOrNull(
      meanOver(charging, (record) => record.outdoorC),
      2,
    ),
    chargeInventoryPct: roundedOrNull(
      meanOver(charging, (record) => record.inventoryPct),
      1,
    ),
    dischargeLeavingC: roundedOrNull(
      meanOver(flowing, (record) => record.leavingWaterC),
      2,
    ),
    dischargeHumidityPct: roundedOrNull(
      meanOver(flowing, (record) => record.roomHumidityPct),
      1,
    ),
    dischargeInventoryPct: roundedOrNull(
      meanOver(flowing, (record) => record.inventoryPct),
      1,
    ),
  };
}
