/**
 * The owner's cron lines. A pattern is matched against the site's wall clock read as if it were UTC, and every match
 * is turned into an instant by the zone rules of `time.ts`: a line in the hour that spring leaves out fires as the
 * clock would have shown it before the change, a line in the hour that autumn repeats fires once, the first time
 * (RFC 5545 3.3.5).
 */
import { Cron } from 'croner';
import type { Command } from '../commands.ts';
import { DAY_MS, fromWallMs, utcOffsetMs } from '../time.ts';

export interface TimetableLine {
  readonly at: string;
  readonly command: Command;
}

/** A line that fired, and when. */
export interface FiredLine {
  readonly command: Command;
  readonly atMs: number;
}

/** How far round an instant a wall match may lie from it: no zone change is longer than a day. */
const ROUND_MS = DAY_MS;
/** Matches of a pattern that are looked at: enough for one every minute of two days. */
const MOST_MATCHES = 2 * 1440 + 1;

/** The line that fired last at or before an instant; of two at once, the one written later. Null when none ever did. */
export function lastFired(lines: readonly TimetableLine[], zone: string, nowMs: number): FiredLine | null {
  let last: FiredLine | null = null;
  for (const line of lines) {
    const atMs = lastMatchMs(line.at, zone, nowMs);
    if (atMs !== null && (last === null || atMs >= last.atMs)) last = { command: line.command, atMs };
  }
  return last;
}

/** A pattern that croner cannot read never fires: a plan must not fail for it. The site file's check finds it beforehand. */
function cronOf(pattern: string): Cron | null {
  try {
    return new Cron(pattern, { timezone: 'UTC' });
  } catch {
    return null;
  }
}

function lastMatchMs(pattern: string, zone: string, nowMs: number): number | null {
  const cron = cronOf(pattern);
  let before = new Date(nowMs + utcOffsetMs(zone, nowMs) + ROUND_MS);
  for (let k = 0; cron && k < MOST_MATCHES; k += 1) {
    const [match] = cron.previousRuns(1, before);
    if (match === undefined) return null;
    const atMs = fromWallMs(zone, match.getTime());
    if (atMs <= nowMs) return atMs;
    before = match;
  }
  return null;
}

/** Every firing in [fromMs, toMs), in order. */
export function firedBetween(
  lines: readonly TimetableLine[],
  zone: string,
  fromMs: number,
  toMs: number,
): FiredLine[] {
  const fired = lines.flatMap((line) =>
    matchesBetween(line.at, zone, fromMs, toMs).map((atMs) => ({ command: line.command, atMs })),
  );
  return fired.toSorted((a, b) => a.atMs - b.atMs);
}

function matchesBetween(pattern: string, zone: string, fromMs: number, toMs: number): number[] {
  const cron = cronOf(pattern);
  const end = toMs + utcOffsetMs(zone, toMs) + ROUND_MS;
  const matches: number[] = [];
  let wall: Date | null = new Date(fromMs + utcOffsetMs(zone, fromMs) - ROUND_MS);
  for (let k = 0; cron && k < MOST_MATCHES * 2; k += 1) {
    wall = cron.nextRun(wall);
    if (wall === null || wall.getTime() > end) break;
    const atMs = fromWallMs(zone, wall.getTime());
    if (atMs >= fromMs && atMs < toMs) matches.push(atMs);
  }
  return matches;
}
