/** When the machines ran, from what their plugs said; the estimate has no part in it. */
import type { SiteConfig } from '../config.ts';
import type { CycleRecord } from '../record.ts';
import { HOUR_MS, MINUTE_MS } from '../time.ts';
import { meanOver, type Span } from './spans.ts';

export function machineRuns(site: SiteConfig, record: CycleRecord): boolean {
  return (record.chillerPowerW ?? 0) > site.chiller.runningAboveW;
}

/** By the pump's power; where none is heard, by what the plant did. */
export function pumpRuns(site: SiteConfig, record: CycleRecord): boolean {
  const { pumpPowerW, mode } = record;
  if (pumpPowerW !== null) return pumpPowerW > site.delivery.runningAboveW;
  return mode === 'discharging' || mode === 'charging-while-discharging';
}

/** A run this long shows the plant in its stride; a shorter silence inside it does not end it. */
const LONG_MS = 1.5 * HOUR_MS;
const BREAK_MS = 10 * MINUTE_MS;

/** The night's last charge of an hour and a half or more; empty when there was none. */
export function lastLongCharge(site: SiteConfig, spans: readonly Span[]): readonly Span[] {
  let run: Span[] = [];
  let found: readonly Span[] = [];
  for (const span of spans) {
    if (!machineRuns(site, span.record)) continue;
    const last = run.at(-1);
    if (last !== undefined && span.fromMs - last.toMs > BREAK_MS) run = [];
    run.push(span);
    if (span.toMs - run[0].fromMs >= LONG_MS) found = run;
  }
  return found;
}

export interface Rest {
  readonly span: Span;
  /** Since the pump and since the machine last ran, as far as the records reach. */
  readonly pumpMs: number;
  readonly machineMs: number;
}

/**
 * Each span with how long pump and machine have rested, counted on from the records before the first one; a gap starts
 * the count afresh.
 */
export function restsOf(
  site: SiteConfig,
  spans: readonly Span[],
  recordsBefore: readonly CycleRecord[],
): Rest[] {
  const all = [...recordsBefore.map(spanOf), ...spans];
  let pumpMs = all.at(0)?.fromMs ?? 0;
  let machineMs = pumpMs;
  let endMs = pumpMs;
  const rests = all.map((span) => {
    if (span.fromMs - endMs > BREAK_MS) pumpMs = machineMs = span.fromMs;
    if (pumpRuns(site, span.record)) pumpMs = span.toMs;
    if (machineRuns(site, span.record)) machineMs = span.toMs;
    endMs = span.toMs;
    return { span, pumpMs: span.toMs - pumpMs, machineMs: span.toMs - machineMs };
  });
  return rests.slice(recordsBefore.length);
}

function spanOf(record: CycleRecord): Span {
  const { atMs, spanMs } = record;
  return { record, fromMs: atMs - spanMs, toMs: atMs, hours: spanMs / HOUR_MS };
}

/** Over its last hour the coolant of a charge that makes ice falls by less than this; while water cools it falls faster. */
const MOST_FALL_K = 1;

/** Whether a charge was making ice when it ended: true where no coolant is heard. */
export function makesIceAtTheEnd(charge: readonly Span[]): boolean {
  const endMs = charge.at(-1)?.toMs ?? 0;
  const coolant = (fromMs: number, toMs: number): number | null =>
    meanOver(
      charge.filter((span) => span.toMs > endMs - fromMs && span.toMs <= endMs - toMs),
      (record) => record.coolantSupplyC,
    );
  const before = coolant(HOUR_MS, HOUR_MS - BREAK_MS);
  const last = coolant(BREAK_MS, 0);
  if (charge.length === 0) return false;
  return before === null || last === null || before - last < MOST_FALL_K;
}
