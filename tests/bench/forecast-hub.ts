/** What a hub says beside the own history; no real forecast of these days is at hand. */
import type { HubPoint } from '../../src/forecasting/forecaster.ts';
import type { Random } from '../../src/numerics/random.ts';
import { DAY_MS, HOUR_MS } from '../../src/time.ts';
import type { WeatherFile } from './forecast-data.ts';

/**
 * `known` gives the measured temperature itself: what is left is the error of cabin, sun and people, the floor under any
 * forecast. `mean-known` gives the mean of each day to come, with the usual course of a day round it: how far a
 * forecast would come that errs in nothing but the hours. `made-up` is the measured temperature with a bias of 1.5 K and
 * a wandering error of about 1.5 K a day ahead.
 */
export type Hub = 'none' | 'known' | 'mean-known' | 'made-up';

const USUAL_DAYS = 30;
/** Days begin at midnight UTC−5, the standard time of both files. */
const MIDNIGHT_UTC_MS = 5 * HOUR_MS;

export function hubSays(hub: Hub, file: WeatherFile, nowMs: number, random: Random): HubPoint[] | null {
  if (hub === 'none') return null;
  const draw = random.fork(`hub ${nowMs}`);
  let offK = 0.5 * draw.normal();
  return Array.from({ length: 42 }, (_, i) => {
    const atMs = nowMs + (i - 2) * HOUR_MS;
    offK = 0.97 * offK + 0.4 * draw.normal();
    if (hub === 'mean-known') return { atMs, temperatureC: meanAndCourse(file, atMs, nowMs) };
    return { atMs, temperatureC: file.at(atMs).outdoorC + (hub === 'known' ? 0 : 1.5 + offK) };
  });
}

function meanAndCourse(file: WeatherFile, atMs: number, nowMs: number): number {
  let sum = 0;
  let days = 0;
  for (let backMs = atMs - DAY_MS; days < USUAL_DAYS; backMs -= DAY_MS) {
    if (dayOf(backMs) >= dayOf(nowMs)) continue;
    sum += file.at(backMs).outdoorC - dayMeanC(file, dayOf(backMs));
    days += 1;
  }
  return dayMeanC(file, dayOf(atMs)) + sum / days;
}

const dayOf = (atMs: number): number => Math.floor((atMs - MIDNIGHT_UTC_MS) / DAY_MS);

const means = new WeakMap<WeatherFile, Map<number, number>>();

function dayMeanC(file: WeatherFile, day: number): number {
  const known = means.get(file) ?? new Map<number, number>();
  means.set(file, known);
  const before = known.get(day);
  if (before !== undefined) return before;
  let sum = 0;
  for (let hour = 0; hour < 24; hour += 1) {
    sum += file.at(day * DAY_MS + MIDNIGHT_UTC_MS + (hour + 0.5) * HOUR_MS).outdoorC;
  }
  known.set(day, sum / 24);
  return sum / 24;
}
