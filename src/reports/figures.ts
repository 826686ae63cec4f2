/**
 * The few figures of a night that drift is read from, each with its own standard error. They come from what was heard, led back to reference conditions
 * as far as one night allows; what the estimator learned has no part in them, for it wanders for reasons of its own.
 * COP and ice making at the rating are the exception: they need the heat made, which only the estimate knows, and drift does not read them.
 */
import type { SiteConfig } from '../config.ts';
import type { CycleRecord } from '../record.ts';
import { MINUTE_MS } from '../time.ts';
import { carnotAt } from './carnot.ts';
import { coilDryK, coilTransferUnits } from './coil-figure.ts';
import { loadPerDegree, roomFollowsPerH } from './house-figures.ts';
import { machineFigures, type MachineFigures } from './machine-figures.ts';
import type { FigureName, NightSheet } from './night-schema.ts';
import { machineRuns, pumpRuns, type Rest } from './runs.ts';
import { energyKwh, hoursOf, meanOver, rounded, roundedOrNull, type Span } from './spans.ts';
import { steadyOf, type Steady } from './steady.ts';

const WATER_W_PER_K_PER_L_MIN = 4205 / 60;
/** Fewer hours than this of ice making give no figure. */
const LEAST_HOURS = 1;
/** Water that stood in the pipes has gone round by then. */
const FLOW_SETTLED_MS = 5 * MINUTE_MS;

type Figures = Record<FigureName, number | null>;

export interface FigureInput {
  readonly site: SiteConfig;
  readonly spans: readonly Span[];
  readonly charge: readonly Span[];
  readonly rests: readonly Rest[];
}

export interface NightFigures {
  readonly figures: Figures;
  readonly figureErrors: Figures;
  readonly conditions: NightSheet['conditions'];
}

export function figuresOf(input: FigureInput): NightFigures {
  const { site, spans, charge, rests } = input;
  const machine = machineFigures(site, charge);
  const flowing = settledFlow(site, spans);
  const steady: Record<SteadyName, Steady | null> = {
    machinePowerAtRatingW: machine.power,
    coolantBelowZeroK: machine.coolant,
    ...loopFigures(site, flowing),
  };
  const single = {
    ...fromEstimate(site, spans),
    loadPerDegree: loadPerDegree(site, spans),
    roomFollowsPerH: roomFollowsPerH(site, rests),
  };
  const values = mapped(steady, (one) => roundedOrNull(one?.value ?? null, 4));
  const errors = mapped(steady, (one) => roundedOrNull(one?.error ?? null, 4));
  return {
    figures: { ...single, ...values },
    figureErrors: { ...mapped(single, () => null), ...errors },
    conditions: conditionsOf(spans, flowing, machine),
  };
}

type SteadyName =
  'machinePowerAtRatingW' | 'coolantBelowZeroK' | 'meltWPerK' | 'coilNtu' | 'flowLPerMin' | 'pumpPowerW';

function mapped<K extends string, T, U>(values: Readonly<Record<K, T>>, by: (value: T) => U): Record<K, U> {
  // oxlint-disable-next-line typescript/no-unsafe-type-assertion -- the same keys
  return Object.fromEntries(Object.entries<T>(values).map(([key, value]) => [key, by(value)])) as Record<
    K,
    U
  >;
}

/** Spans in which the pump has run for a while. */
function settledFlow(site: SiteConfig, spans: readonly Span[]): Span[] {
  let sinceMs: number | null = null;
  return spans.filter((span) => {
    if (!pumpRuns(site, span.record)) {
      sinceMs = null;
      return false;
    }
    sinceMs ??= span.fromMs;
    return span.fromMs - sinceMs >= FLOW_SETTLED_MS;
  });
}

function loopFigures(site: SiteConfig, flowing: readonly Span[]) {
  const of = (pick: (record: CycleRecord) => number | null): Steady | null =>
    steadyOf(
      flowing.flatMap(({ record }) => {
        const value = pick(record);
        return value === null ? [] : [{ atMs: record.atMs, value }];
      }),
    );
  const metered = 'loop-flow' in site.points;
  return {
    meltWPerK: of((record) =>
      meltConductance(record, metered ? record.loopFlowLPerMin : site.delivery.flowLPerMin),
    ),
    coilNtu: of((record) => coilTransferUnits(site, record)),
    flowLPerMin: metered ? of((record) => record.loopFlowLPerMin) : null,
    pumpPowerW: of((record) => record.pumpPowerW),
  };
}

/** From entering and leaving water against ice at 0 °C: UA = ṁ c ln(entering/leaving), effectiveness of one phase change. */
function meltConductance(record: CycleRecord, flow: number | null): number | null {
  const { enteringWaterC: entering, leavingWaterC: leaving } = record;
  if (entering === null || leaving === null || flow === null) return null;
  if (!(leaving > 0.1 && entering > leaving && flow > 0)) return null;
  return flow * WATER_W_PER_K_PER_L_MIN * Math.log(entering / leaving);
}

/** Ice making and COP led back to the rating's outdoor temperature, from the heat that the estimate says was made. */
function fromEstimate(site: SiteConfig, spans: readonly Span[]) {
  const charging = spans.filter(({ record }) => record.chargingW > 0 && machineRuns(site, record));
  const hours = hoursOf(charging);
  const outdoorC = meanOver(charging, (record) => record.outdoorC);
  if (!(hours >= LEAST_HOURS) || outdoorC === null) return { copAtRating: null, iceMakingAtRatingW: null };
  const madeW = (energyKwh(charging, (record) => record.chargingW) * 1000) / hours;
  const usedW = (energyKwh(charging, (record) => record.chillerPowerW) * 1000) / hours;
  const { ratedEvaporatingC, ratedOutdoorC } = site.chiller;
  const lift = carnotAt(ratedEvaporatingC, ratedOutdoorC) / carnotAt(ratedEvaporatingC, outdoorC);
  return {
    copAtRating: rounded((madeW / usedW) * lift, 4),
    // of the change with outdoor temperature about half falls on capacity and half on power
    iceMakingAtRatingW: rounded(madeW * Math.sqrt(lift), 2),
  };
}

function conditionsOf(
  spans: readonly Span[],
  flowing: readonly Span[],
  machine: MachineFigures,
): NightSheet['conditions'] {
  const charging = spans.filter(({ record }) => record.chargingW > 0);
  return {
    chargeOutdoorC: roundedOrNull(machine.outdoorC, 2),
    chargeCoolantC: roundedOrNull(machine.coolantC, 2),
    chargeInventoryPct: roundedOrNull(
      meanOver(charging, (record) => record.inventoryPct),
      1,
    ),
    dischargeInventoryPct: roundedOrNull(
      meanOver(flowing, (record) => record.inventoryPct),
      1,
    ),
    dischargeLeavingC: roundedOrNull(
      meanOver(flowing, (record) => record.leavingWaterC),
      2,
    ),
    dischargeCoilDryK: roundedOrNull(meanOver(flowing, coilDryK), 2),
    dischargeHumidityPct: roundedOrNull(
      meanOver(flowing, (record) => record.roomHumidityPct),
      1,
    ),
  };
}
