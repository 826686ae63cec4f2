/** How much of the night was seen: gaps, doubtful clock, and each probe's silence. */
import type { SiteConfig } from '../config.ts';
import type { PointId } from '../points.ts';
import { formatInstant, HOUR_MS, localClock, MINUTE_MS, type Night } from '../time.ts';
import type { NightSheet } from './night-schema.ts';
import { hoursOf, rounded, type Span } from './spans.ts';

/** A gap is more than three cycles of silence, and never less than a minute and a half. */
const SHORTEST_GAP_MS = 90_000;
/** Share of the night that must be covered for a whole sheet; 2 % is half an hour. */
const WHOLE_PCT = 98;

export interface Gap {
  readonly fromMs: number;
  readonly toMs: number;
}

export function gapsOf(spans: readonly Span[], night: Night, untilMs: number): Gap[] {
  const gaps: Gap[] = [];
  let endMs = night.startMs;
  const check = (fromMs: number, toMs: number, cycleMs: number): void => {
    if (toMs - fromMs > Math.max(SHORTEST_GAP_MS, 3 * cycleMs)) gaps.push({ fromMs, toMs });
  };
  for (const span of spans) {
    check(endMs, span.fromMs, span.record.spanMs);
    endMs = span.toMs;
  }
  check(endMs, Math.min(untilMs, night.endMs), 0);
  return gaps;
}

type Coverage = Pick<NightSheet, 'whole' | 'partialBecause' | 'coveredPct' | 'gaps' | 'clockDoubtfulMinutes'>;

export function coverageOf(spans: readonly Span[], night: Night, issuedMs: number, zone: string): Coverage {
  const gaps = gapsOf(spans, night, issuedMs);
  const coveredPct = (hoursOf(spans) / ((night.endMs - night.startMs) / HOUR_MS)) * 100;
  const reasons: string[] = [];
  if (issuedMs < night.endMs)
    reasons.push(`issued at ${localClock(zone, issuedMs)}, before the night was over`);
  if (spans.length === 0) reasons.push('nothing was recorded');
  else if (coveredPct < WHOLE_PCT && gaps.length > 0) reasons.push(gapWords(gaps, zone));
  return {
    whole: coveredPct >= WHOLE_PCT && issuedMs >= night.endMs,
    partialBecause: reasons.join('; '),
    coveredPct: rounded(coveredPct, 1),
    gaps: gaps.map((gap) => ({
      from: formatInstant(gap.fromMs),
      to: formatInstant(gap.toMs),
      minutes: rounded((gap.toMs - gap.fromMs) / MINUTE_MS, 1),
    })),
    clockDoubtfulMinutes: rounded(hoursOf(spans, (record) => record.clock === 'doubtful') * 60, 1),
  };
}

function gapWords(gaps: readonly Gap[], zone: string): string {
  const minutes = gaps.reduce((sum, gap) => sum + (gap.toMs - gap.fromMs), 0) / MINUTE_MS;
  const longest = gaps.reduce((a, b) => (b.toMs - b.fromMs > a.toMs - a.fromMs ? b : a));
  const where = `${localClock(zone, longest.fromMs)}–${localClock(zone, longest.toMs)}`;
  return `${Math.round(minutes)} min without records in ${gaps.length} gap${gaps.length === 1 ? '' : 's'}, the longest ${where}`;
}

/** What the estimator knows of a probe at the end of the night. */
export interface ProbeState {
  readonly point: PointId;
  readonly errorAtIcePointK: number | null;
  readonly sd: number | null;
  readonly atMs: number | null;
  readonly setAside: string | null;
}

export function probesOf(
  site: SiteConfig,
  spans: readonly Span[],
  states: readonly ProbeState[],
): NightSheet['probes'] {
  const stale = new Map<string, number>();
  for (const span of spans) {
    if (span.record.pointsStale === '') continue;
    for (const point of span.record.pointsStale.split(',')) {
      const name = point.trim();
      stale.set(name, (stale.get(name) ?? 0) + span.hours * 60);
    }
  }
  return Object.keys(site.points)
    .toSorted()
    .map((point) => {
      const state = states.find((one) => one.point === point);
      return {
        point,
        staleMinutes: rounded(stale.get(point) ?? 0, 1),
        errorAtIcePointK: state?.errorAtIcePointK == null ? null : rounded(state.errorAtIcePointK, 3),
        errorSdK: state?.sd == null ? null : rounded(state.sd, 3),
        checked: state?.atMs == null ? null : formatInstant(state.atMs),
        setAside: state?.setAside ?? null,
      };
    });
}
