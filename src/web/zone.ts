/** The site's offsets from UTC as a short table, so that a viewer needs no zone data of its own. */
import { DAY_MS, HOUR_MS, MINUTE_MS, utcOffsetMs } from '../time.ts';
import type { ZoneOffset } from './source.ts';

/** How far the table reaches: a ledger of a year and a bit back, the longest plan ahead. */
const BACK_MS = 460 * DAY_MS;
const AHEAD_MS = 8 * DAY_MS;

/** Every change of offset from `BACK_MS` before to `AHEAD_MS` after an instant, exact to the minute. */
export function zoneOffsets(zone: string, nowMs: number): ZoneOffset[] {
  const startMs = nowMs - BACK_MS;
  const offsets: ZoneOffset[] = [{ fromMs: startMs, offsetMs: utcOffsetMs(zone, startMs) }];
  for (let atMs = startMs; atMs < nowMs + AHEAD_MS; atMs += 6 * HOUR_MS) {
    const nextMs = atMs + 6 * HOUR_MS;
    const offsetMs = utcOffsetMs(zone, nextMs);
    if (offsetMs !== utcOffsetMs(zone, atMs))
      offsets.push({ fromMs: changeIn(zone, atMs, nextMs), offsetMs });
  }
  return offsets;
}

/** The first whole minute at which the offset of `highMs` holds; `lowMs` has another one. */
function changeIn(zone: string, lowMs: number, highMs: number): number {
  const after = utcOffsetMs(zone, highMs);
  let low = Math.floor(lowMs / MINUTE_MS);
  let high = Math.ceil(highMs / MINUTE_MS);
  while (high - low > 1) {
    const middle = Math.floor((low + high) / 2);
    if (utcOffsetMs(zone, middle * MINUTE_MS) === after) high = middle;
    else low = middle;
  }
  return high * MINUTE_MS;
}
