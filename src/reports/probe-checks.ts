/**
 * Readings that should be the same every night, because nature holds the place: water beside ice, coolant at rest in a bank that
 * holds ice. A thermometer that changes there has changed itself. Entering and leaving water have no such place: under flow they
 * show the load, at rest the air round the pipe, hours late.
 */
import type { SiteConfig } from '../config.ts';
import { isPointId, type PointId } from '../points.ts';
import type { CycleRecord } from '../record.ts';
import { HOUR_MS } from '../time.ts';
import type { NightSheet } from './night-schema.ts';
import { makesIceAtTheEnd, type Rest } from './runs.ts';
import { rounded, type Span } from './spans.ts';
import { blockMedians, steadyOf, type Steady } from './steady.ts';

type Check = NightSheet['probeChecks'][number];

/** Of a charge's end the last hour: by then the water has long come to the ice. */
const LAST_MS = HOUR_MS;
/** A step of a one-wire thermometer (common practice, no source). */
const STILL_K = 0.0625;
/** A resting coolant pipe has taken the bank's temperature by then, and the bank has not yet left 0 °C. */
const [COOLANT_FROM_MS, COOLANT_TO_MS] = [2 * HOUR_MS, 4 * HOUR_MS];
const IN_THE_BANK = {
  'bank-top': (record: CycleRecord) => record.bankTopC,
  'bank-middle': (record: CycleRecord) => record.bankMiddleC,
  'bank-bottom': (record: CycleRecord) => record.bankBottomC,
} as const;
const IN_THE_COOLANT = {
  'coolant-supply': (record: CycleRecord) => record.coolantSupplyC,
  'coolant-return': (record: CycleRecord) => record.coolantReturnC,
} as const;
export function probeChecksOf(site: SiteConfig, charge: readonly Span[], rests: readonly Rest[]): Check[] {
  const endMs = charge.at(-1)?.toMs ?? 0;
  const atIce = charge.filter((span) => span.toMs > endMs - LAST_MS);
  // water that still cools, or has cooled past 0 °C without a first crystal, holds nothing in place
  if (!makesIceAtTheEnd(charge)) return [];
  const coolant = rests.filter(
    ({ span, machineMs }) => span.fromMs >= endMs && machineMs > COOLANT_FROM_MS && machineMs < COOLANT_TO_MS,
  );
  return [
    ...checks(site, bankProbes(site), atIce, 'beside-ice'),
    ...checks(
      site,
      IN_THE_COOLANT,
      coolant.map(({ span }) => span),
      'coolant-at-rest',
    ),
  ];
}

type Picks = Readonly<Record<string, (record: CycleRecord) => number | null>>;

/** In an open tub the densest water stands at the bottom: only the upper probe meets the ice. */
function bankProbes(site: SiteConfig): Picks {
  return site.bank.form === 'open-tub' ? { 'bank-top': IN_THE_BANK['bank-top'] } : IN_THE_BANK;
}

function checks(site: SiteConfig, picks: Picks, spans: readonly Span[], where: Check['where']): Check[] {
  return Object.entries(picks).flatMap(([point, pick]): Check[] => {
    if (!isPointId(point) || !(point in site.points)) return [];
    const samples = spans.flatMap(({ record }) => {
      const value = pick(record);
      return value === null ? [] : [{ atMs: record.atMs, value }];
    });
    const steady = steadyOf(samples);
    if (steady === null || (where === 'beside-ice' && !standsStill(blockMedians(samples)))) return [];
    return [checkOf(point, where, steady)];
  });
}

/** Water that still cools has not met the ice. */
function standsStill(medians: readonly number[]): boolean {
  return Math.abs(medians[medians.length - 1] - medians[0]) <= STILL_K;
}

function checkOf(point: PointId, where: Check['where'], { value, error }: Steady): Check {
  return {
    point,
    where,
    readC: rounded(value, 3),
    errorK: rounded(error, 3),
  };
}
