/**
 * The night sheet: what one night made, used, cost and delivered, whether its energy balance closes, and what spoke
 * against it. A pure function of the night's records, so a sheet can be written again from the store at any time and
 * a late reading shows as a new revision instead of a silent change.
 */
import type { SiteConfig } from '../config.ts';
import { RimeholdError } from '../errors.ts';
import type { CycleRecord, PlanRecord } from '../record.ts';
import { formatInstant, HOUR_MS, type Night } from '../time.ts';
import { asIce, balanceOf, iceAtStart, iceOf, type IceState } from './account.ts';
import { CAUTION } from './caution.ts';
import { likeForLike, type WayRun } from './compare.ts';
import { coverageOf, probesOf, type ProbeState } from './coverage.ts';
import { copOf, electricityOf, machineMoney, supplyOf } from './electricity.ts';
import { displayFor } from './display.ts';
import { forecastOf, noonPlan } from './forecast-check.ts';
import { NIGHT_SHEET_SCHEMA, type NightSheet } from './night-schema.ts';
import { balanceAsKnown, whyNotKnown } from './not-known.ts';
import { commandsOf, interlocksOf, toldKwh, toldOf, wishesOf, type Told } from './orders.ts';
import { plantFigures } from './plant-figures.ts';
import { comfortOf, deliveredOf, weatherOf } from './service.ts';
import { rounded, roundedOrNull, spansOf, type Span } from './spans.ts';
import { summaryOf } from './summary.ts';
import { traceOf } from './trace.ts';

export type { NightSheet } from './night-schema.ts';

export interface NightInput {
  readonly site: SiteConfig;
  readonly night: Night;
  /** In order of time. Records of the day before, if given, serve as the starting point and as the baseline. */
  readonly records: readonly CycleRecord[];
  readonly plans: readonly PlanRecord[];
  /** What the simple ways would have cost, see compare.ts. */
  readonly ways?: readonly WayRun[];
  /** Probes as the estimator knows them at the end of the night. */
  readonly probes?: readonly ProbeState[];
  readonly learned?: readonly { name: string; value: number; sd: number | null; unit: string }[];
  /** What the owner told of the bank in this night. */
  readonly told?: readonly Told[];
  readonly revision: number;
  readonly issuedMs: number;
}

/** Less ice than this says nothing about its price. */
const LEAST_MADE_KWH = 0.2;

/** Throws `usage` when the night has no record at all. */
export function nightSheet(input: NightInput): NightSheet {
  const { site, night } = input;
  const spans = spansOf(input.records, night);
  if (spans.length === 0) {
    throw new RimeholdError(
      'usage',
      `Expected records of the night ${night.date}, found none; name a night on which the daemon ran.`,
    );
  }
  const before = input.records.filter((record) => record.atMs <= night.startMs);
  const start = iceAtStart(spans, before.at(-1) ?? null, site);
  const probes = input.probes ?? [];
  const coverage = coverageOf(spans, night, input.issuedMs, site.site.zone);
  const show = displayFor(site.site);
  const doubtfulMinutes = coverage.clockDoubtfulMinutes;
  const ice = iceOf(spans, start, site);
  const ground = { whole: coverage.whole, ice };
  const balance = balanceAsKnown(accountOf(input, spans, start, doubtfulMinutes), ground);
  const ways = whyNotKnown(ground) === '' ? (input.ways ?? []) : [];
  const electricity = electricityOf(site, spans);
  const worth = worthOfIce(site, spans, balance.inKwh);
  const figures = {
    schema: NIGHT_SHEET_SCHEMA as typeof NIGHT_SHEET_SCHEMA,
    site: headOf(site),
    night: nightHead(night),
    revision: input.revision,
    revisedBecause: '',
    issued: formatInstant(input.issuedMs),
    ...coverage,
    strategy: spans[spans.length - 1].record.strategy,
    ice,
    made: asIce(balance.inKwh),
    melted: asIce(balance.outKwh),
    leaked: asIce(balance.leakKwh),
    balance,
    electricity,
    supply: supplyOf(spans),
    comparisons: ways.map((way) => likeForLike(way, electricity.money, ice.endKwh, worth)),
    iceWorthMoneyPerKwh: roundedOrNull(worth, 5),
    cop: copOf(site, spans, night),
    delivered: deliveredOf(spans),
    comfort: comfortOf(spans),
    weather: weatherOf(spans),
    forecast: forecastOf(noonPlan(input.plans, night), spans, night, before),
    commands: commandsOf(spans),
    wishes: wishesOf(spans),
    ...toldOf(input.told ?? []),
    interlocks: interlocksOf(spans),
    probes: probesOf(site, spans, probes),
    learned: (input.learned ?? []).map((one) => ({
      ...one,
      value: rounded(one.value, 5),
      sd: roundedOrNull(one.sd, 5),
    })),
    ...plantFigures(site, spans, before),
    trace: traceOf(spans, night),
    caution: CAUTION,
  } satisfies Omit<NightSheet, 'summary'>;
  return { ...figures, summary: summaryOf(figures, show) };
}

function accountOf(
  input: NightInput,
  spans: readonly Span[],
  start: IceState,
  doubtfulMinutes: number,
): NightSheet['balance'] {
  const { site, night, probes = [], learned = [] } = input;
  const show = displayFor(site.site);
  const told = toldKwh(input.told ?? []);
  return balanceOf({ site, spans, start, night, probes, learned, show, doubtfulMinutes, toldKwh: told });
}

function headOf(site: SiteConfig): NightSheet['site'] {
  const { id, name, zone, currency, units } = site.site;
  return { id, name, zone, currency, units };
}

function nightHead(night: Night): NightSheet['night'] {
  return {
    date: night.date,
    start: formatInstant(night.startMs),
    end: formatInstant(night.endMs),
    hours: rounded((night.endMs - night.startMs) / HOUR_MS, 2),
  };
}

/** What a kWh of ice is worth at the end of the night: what making one cost; on a night that made none, the plan's figure. */
function worthOfIce(site: SiteConfig, spans: readonly Span[], madeKwh: number): number | null {
  if (madeKwh < LEAST_MADE_KWH) return spans[spans.length - 1].record.worthOfIceMoneyPerKwh;
  return machineMoney(site, spans) / madeKwh;
}

/**
 * The next revision of a sheet with its reason, or null when nothing but its number and date of issue would change: a sheet is
 * written once, and again only for a reason. What the learners said at the end of the night is known only then, so a
 * sheet made later without it keeps what was written.
 */
export function nextRevision(written: NightSheet, fresh: NightSheet, because: string): NightSheet | null {
  const unlearned = fresh.learned.length === 0;
  const whole = unlearned
    ? { ...fresh, learned: written.learned, probes: probesKept(written, fresh) }
    : fresh;
  if (bare(written) === bare(whole)) return null;
  return { ...whole, revision: written.revision + 1, revisedBecause: because };
}

function probesKept(written: NightSheet, fresh: NightSheet): NightSheet['probes'] {
  return fresh.probes.map((probe) => {
    const before = written.probes.find((one) => one.point === probe.point);
    return before === undefined ? probe : { ...before, staleMinutes: probe.staleMinutes };
  });
}

function bare(sheet: NightSheet): string {
  return JSON.stringify({ ...sheet, revision: 0, revisedBecause: '', issued: '' });
}
