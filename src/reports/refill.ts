/**
 * What the bank lost between two charges, told by the next charge alone. Ice is an insulator, so the coolant falls as it grows: when a charge brings the coolant
 * down to where the last one left it, the bank holds what it held then, and what was made since is what was melted and
 * leaked. How the coolant falls with the ice is this bank's own and need not be known; only the same bank is compared with itself.
 */
import type { SiteConfig } from '../config.ts';
import { quantile } from '../numerics/quantile.ts';
import type { CycleRecord } from '../record.ts';
import { formatInstant, MINUTE_MS } from '../time.ts';
import { catalogueW } from './machine-figures.ts';
import type { NightSheet } from './night-schema.ts';
import { machineRuns, makesIceAtTheEnd, pumpRuns } from './runs.ts';
import { energyKwh, rounded, type Span } from './spans.ts';

type Refill = NonNullable<NightSheet['refill']>;
type Sums = Refill['until'];

/** Specific heat times density of water near 5 °C, W·min/(L·K): 4.205 kJ/(kg·K) × 1.000 kg/L (IAPWS-95). */
const WATER_W_PER_K_PER_L_MIN = 4205 / 60;
const POINT_MS = 15 * MINUTE_MS;
/** Until then the coolant has not settled after the start. */
const SETTLED_MS = 20 * MINUTE_MS;

/** Null where coolant, outdoor air or entering water have no point: nothing of this can be told then. */
export function refillOf(
  site: SiteConfig,
  spans: readonly Span[],
  charge: readonly Span[],
): NightSheet['refill'] {
  const { points } = site;
  if (!('coolant-supply' in points && 'outdoor-temperature' in points && 'entering-water' in points))
    return null;
  const endMs = charge.at(-1)?.toMs ?? Number.POSITIVE_INFINITY;
  return {
    chargeEnd: charge.length === 0 ? null : formatInstant(endMs),
    until: sumsOf(
      site,
      spans.filter((span) => span.toMs <= endMs),
    ),
    after: sumsOf(
      site,
      spans.filter((span) => span.toMs > endMs),
    ),
    curve: makesIceAtTheEnd(charge) ? curveOf(site, charge) : [],
  };
}

/** Heat that the loop brought in as heard: flow times the rise of the water; by the set flow where none is heard. */
export function loopHeatW(site: SiteConfig, record: CycleRecord): number | null {
  if (!pumpRuns(site, record)) return 0;
  const { enteringWaterC, leavingWaterC } = record;
  const flow = 'loop-flow' in site.points ? record.loopFlowLPerMin : site.delivery.flowLPerMin;
  if (enteringWaterC === null || leavingWaterC === null || flow === null) return null;
  return flow * WATER_W_PER_K_PER_L_MIN * (enteringWaterC - leavingWaterC);
}

function surroundC(site: SiteConfig, record: CycleRecord): number {
  if (record.bankSurroundC !== null) return record.bankSurroundC;
  const { stands } = site.bank;
  const beside = stands === 'indoors' ? record.roomC : stands === 'outdoors' ? record.outdoorC : null;
  return beside ?? site.bank.surroundC;
}

function sumsOf(site: SiteConfig, spans: readonly Span[]): Sums {
  const made = (record: CycleRecord): number | null =>
    machineRuns(site, record) ? catalogueW(site, record) : 0;
  const hoursUnheard = spans.reduce(
    (sum, { record, hours }) => sum + (made(record) === null || loopHeatW(site, record) === null ? hours : 0),
    0,
  );
  return {
    madeKwh: rounded(energyKwh(spans, made), 3),
    meltedKwh: rounded(
      energyKwh(spans, (record) => loopHeatW(site, record)),
      3,
    ),
    surroundKh: rounded(
      spans.reduce((sum, { record, hours }) => sum + surroundC(site, record) * hours, 0),
      2,
    ),
    unheardHours: rounded(hoursUnheard, 3),
  };
}

/** From the charge's end back to its start, a point each quarter hour. */
function curveOf(site: SiteConfig, charge: readonly Span[]): Refill['curve'] {
  if (charge.length === 0) return [];
  const endMs = charge[charge.length - 1].toMs;
  const startMs = charge[0].fromMs + SETTLED_MS;
  const points: { madeKwh: number; belowZeroK: number; outdoorC: number }[] = [];
  for (let toMs = endMs; toMs - POINT_MS >= startMs; toMs -= POINT_MS) {
    const inside = charge.filter((span) => span.toMs > toMs - POINT_MS && span.toMs <= toMs);
    const coolant = inside.flatMap(({ record }) => record.coolantSupplyC ?? []);
    const outdoor = inside.flatMap(({ record }) => record.outdoorC ?? []);
    if (coolant.length === 0 || outdoor.length === 0) continue;
    const later = charge.filter((span) => span.toMs > toMs - POINT_MS / 2);
    points.push({
      madeKwh: rounded(
        energyKwh(later, (record) => catalogueW(site, record)),
        3,
      ),
      belowZeroK: rounded(-quantile(coolant, 0.5), 3),
      outdoorC: rounded(quantile(outdoor, 0.5), 2),
    });
  }
  return points;
}
