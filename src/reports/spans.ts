/** A night's records as stretches of time that do not overlap, and sums over them. */
import type { CycleRecord } from '../record.ts';
import { HOUR_MS, type Night } from '../time.ts';
import { grouped } from './grouped.ts';

/** The stretch of time that a record speaks for, cut to the night and to where the record before it ended. */
export interface Span {
  readonly record: CycleRecord;
  readonly fromMs: number;
  readonly toMs: number;
  readonly hours: number;
}

/** Records sorted by time; those outside the night are left out. */
export function spansOf(records: readonly CycleRecord[], night: Night): Span[] {
  const spans: Span[] = [];
  let endMs = night.startMs;
  for (const record of records) {
    if (record.atMs <= night.startMs || record.atMs > night.endMs) continue;
    const fromMs = Math.max(record.atMs - record.spanMs, endMs);
    endMs = Math.max(endMs, record.atMs);
    spans.push({ record, fromMs, toMs: record.atMs, hours: Math.max(0, record.atMs - fromMs) / HOUR_MS });
  }
  return spans;
}

type Pick = (record: CycleRecord) => number | null;

/** Energy in kWh of a power in W; records that do not know it count for nothing. */
export function energyKwh(spans: readonly Span[], power: Pick): number {
  return spans.reduce((sum, span) => sum + ((power(span.record) ?? 0) * span.hours) / 1000, 0);
}

export function hoursOf(spans: readonly Span[], when: (record: CycleRecord) => boolean = () => true): number {
  return spans.reduce((sum, span) => sum + (when(span.record) ? span.hours : 0), 0);
}

/** Mean over the time in which it is known, null when it never is. */
export function meanOver(spans: readonly Span[], pick: Pick): number | null {
  let weighted = 0;
  let hours = 0;
  for (const span of spans) {
    const value = pick(span.record);
    if (value === null) continue;
    weighted += value * span.hours;
    hours += span.hours;
  }
  return hours > 0 ? weighted / hours : null;
}

/** The span with the greatest value, null when no span knows it. */
export function extreme(
  spans: readonly Span[],
  pick: Pick,
  sign: 1 | -1,
): { value: number; atMs: number } | null {
  let best: { value: number; atMs: number } | null = null;
  for (const { record } of spans) {
    const value = pick(record);
    if (value === null || (best !== null && !(sign * value > sign * best.value))) continue;
    best = { value, atMs: record.atMs };
  }
  return best;
}

/** Spans by the slot they end in, counted from `startMs`. */
export function bySlot(spans: readonly Span[], startMs: number, slotMs: number): Map<number, Span[]> {
  return grouped(spans, (span) => Math.floor((span.toMs - 1 - startMs) / slotMs));
}

/** Neighbours with the same key, as one stretch each. */
export function runsOf(spans: readonly Span[], key: (record: CycleRecord) => string): Span[][] {
  const runs: Span[][] = [];
  let last: string | null = null;
  for (const span of spans) {
    const next = key(span.record);
    if (next === last) runs[runs.length - 1].push(span);
    else runs.push([span]);
    last = next;
  }
  return runs;
}

/** To a number of decimals, without a negative zero. */
export function rounded(value: number, decimals: number): number {
  const scale = 10 ** decimals;
  return Math.round(value * scale) / scale + 0;
}

export function roundedOrNull(value: number | null, decimals: number): number | null {
  return value === null ? null : rounded(value, decimals);
}
