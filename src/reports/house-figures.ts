/** How the rooms answer to the weather while nothing cools them, and what they ask of the ice. */
import type { SiteConfig } from '../config.ts';
import { quantile } from '../numerics/quantile.ts';
import { HOUR_MS, localMinuteOfDay, MINUTE_MS } from '../time.ts';
import { loopHeatW } from './refill.ts';
import type { Rest } from './runs.ts';
import { energyKwh, rounded, type Span } from './spans.ts';

/** The evening, when doors and windows are somebody's doing: local minutes of the day. */
const [EVENING_FROM, EVENING_TO] = [16 * 60, 24 * 60];
/** After the coil stopped the room comes up by itself for a while. */
const COIL_FORGOTTEN_MS = 40 * MINUTE_MS;
/** Stretch over which the room is watched, and how often. */
const STRETCH_MS = 45 * MINUTE_MS;
const EVERY_MS = 5 * MINUTE_MS;
const ENDS_MS = 5 * MINUTE_MS;
/** With less between room and outdoor air, nothing can be seen of what passes between them. */
const LEAST_DIFFERENCE_K = 1.5;
/** What fabric, sun and people do to a room in an hour must not look like air from outside: a small difference counts as this. */
const FULL_DIFFERENCE_K = 4;
const LEAST_STRETCHES = 6;
/** The strongest tenth of the stretches: a window stands open for part of an evening only. */
const STRONGEST = 0.9;
/** Base of the degree-hours, below the comfort limit: below it a cabin needs no cooling (common practice, no source). */
const BASE_BELOW_LIMIT_K = 6;

/**
 * How fast the rooms follow the outdoor air at their fastest in the evening with coil and pump at rest: share of the difference
 * an hour. A shut cabin follows by its fabric, slowly; air that passes through an open door moves it within the hour.
 */
export function roomFollowsPerH(site: SiteConfig, rests: readonly Rest[]): number | null {
  const quiet = rests.filter(
    ({ span, pumpMs }) => pumpMs >= COIL_FORGOTTEN_MS && isEvening(site.site.zone, span.toMs),
  );
  const rates: number[] = [];
  let nextMs = 0;
  for (let i = 0; i < quiet.length; i++) {
    const fromMs = quiet[i].span.toMs;
    if (fromMs < nextMs) continue;
    nextMs = fromMs + EVERY_MS;
    const rate = rateOver(quiet, i, fromMs);
    if (rate !== null) rates.push(rate);
  }
  return rates.length < LEAST_STRETCHES ? null : rounded(quantile(rates, STRONGEST), 4);
}

function isEvening(zone: string, atMs: number): boolean {
  const minute = localMinuteOfDay(zone, atMs - 1);
  return minute >= EVENING_FROM && minute < EVENING_TO;
}

function rateOver(quiet: readonly Rest[], first: number, fromMs: number): number | null {
  const head: number[] = [];
  const tail: number[] = [];
  const apart: number[] = [];
  for (let i = first; i < quiet.length && quiet[i].span.toMs <= fromMs + STRETCH_MS; i++) {
    const { toMs, record } = quiet[i].span;
    // a pump that ran in between begins its rest anew
    if (i > first && quiet[i].pumpMs < quiet[i - 1].pumpMs) return null;
    if (record.roomC === null || record.outdoorC === null) continue;
    apart.push(record.outdoorC - record.roomC);
    if (toMs < fromMs + ENDS_MS) head.push(record.roomC);
    if (toMs > fromMs + STRETCH_MS - ENDS_MS) tail.push(record.roomC);
  }
  if (head.length === 0 || tail.length === 0) return null;
  const differenceK = mean(apart);
  if (!(Math.abs(differenceK) >= LEAST_DIFFERENCE_K)) return null;
  const towardsK = (mean(tail) - mean(head)) * Math.sign(differenceK);
  return towardsK / ((STRETCH_MS - ENDS_MS) / HOUR_MS) / Math.max(FULL_DIFFERENCE_K, Math.abs(differenceK));
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

/** Heat that the loop brought, as heard, for each degree-hour of the outdoor air above the base; null on a cool night. */
export function loadPerDegree(site: SiteConfig, spans: readonly Span[]): number | null {
  const baseC = site.comfort.limitC - BASE_BELOW_LIMIT_K;
  const degreeHours = spans.reduce(
    (sum, { record, hours }) => sum + Math.max(0, (record.outdoorC ?? baseC) - baseC) * hours,
    0,
  );
  const unheard = spans.some(({ record }) => loopHeatW(site, record) === null);
  const outKwh = energyKwh(spans, (record) => loopHeatW(site, record));
  return !unheard && degreeHours > 20 && outKwh > 0.5 ? rounded(outKwh / degreeHours, 5) : null;
}
