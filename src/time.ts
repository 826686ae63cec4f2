/**
 * Instants, local wall time, durations and the night. Instants are epoch milliseconds (UTC) everywhere;
 * a wall time is a calendar reading without a zone. Zone rules come from the moment-timezone data package, not
 * from `Intl`: Node ships its own zone data, which lags behind governments by years on a machine that nobody updates.
 */
import moment from 'moment-timezone';
import { RimeholdError } from './errors.ts';

export const MINUTE_MS = 60_000;
export const HOUR_MS = 3_600_000;
export const DAY_MS = 86_400_000;

/** Where "now" and waiting come from: the real clock, or a lapse clock. Constructed only at the edge. */
export interface Clock {
  nowMs(): number;
  /** Time that nobody sets, ms from an origin of its own; absent where `nowMs` is never set. */
  steadyMs?(): number;
  /** Calls back every `periodMs` of this clock's time until the returned function is called. */
  every(periodMs: number, callback: () => void): () => void;
  /** Calls back once after `delayMs` of this clock's time unless the returned function is called first. */
  after(delayMs: number, callback: () => void): () => void;
}

export const ZONE_DATA_VERSION: string = moment.tz.dataVersion;

const EXPECTED_ZONE = 'a zone of the IANA time zone database such as "Europe/Madrid"';

function zoneRules(zone: string): moment.MomentZone {
  const rules = moment.tz.zone(zone);
  if (!rules) {
    throw new RimeholdError('config', `Expected ${EXPECTED_ZONE}, found "${zone}".`, { zone });
  }
  return rules;
}

export function isZone(zone: string): boolean {
  return moment.tz.zone(zone) !== null;
}

/** Milliseconds that local wall time is ahead of UTC at an instant. Throws `config` on an unknown zone. */
export function utcOffsetMs(zone: string, atMs: number): number {
  return -zoneRules(zone).utcOffset(atMs) * MINUTE_MS;
}

/** A calendar reading without a zone; month and day count from 1. */
export interface WallTime {
  readonly year: number;
  readonly month: number;
  readonly day: number;
  readonly hour: number;
  readonly minute: number;
  readonly second: number;
  /** 0 = Sunday … 6 = Saturday. */
  readonly weekday: number;
}

export function toWall(zone: string, atMs: number): WallTime {
  const d = new Date(atMs + utcOffsetMs(zone, atMs));
  return {
    year: d.getUTCFullYear(),
    month: d.getUTCMonth() + 1,
    day: d.getUTCDate(),
    hour: d.getUTCHours(),
    minute: d.getUTCMinutes(),
    second: d.getUTCSeconds(),
    weekday: d.getUTCDay(),
  };
}

/**
 * The instant of a wall reading, given as if it were UTC milliseconds. RFC 5545 3.3.5: a reading in a gap takes the
 * offset before the gap; an ambiguous reading is its first occurrence. In both cases that is the offset before the
 * change: whichever rule, reading − offset-before ≤ reading − offset-after, or is the only one that exists.
 */
export function fromWallMs(zone: string, wallMs: number): number {
  const before = wallMs - utcOffsetMs(zone, wallMs - DAY_MS);
  if (before + utcOffsetMs(zone, before) === wallMs) return before;
  const after = wallMs - utcOffsetMs(zone, wallMs + DAY_MS);
  return after + utcOffsetMs(zone, after) === wallMs ? after : before;
}

/** The instant of a local date and time of day (minutes from local midnight; may exceed a day). */
export function fromWall(zone: string, year: number, month: number, day: number, minuteOfDay = 0): number {
  return fromWallMs(zone, Date.UTC(year, month - 1, day) + minuteOfDay * MINUTE_MS);
}

/** `YYYY-MM-DD` of the local date at an instant. */
export function localDate(zone: string, atMs: number): string {
  return new Date(atMs + utcOffsetMs(zone, atMs)).toISOString().slice(0, 10);
}

/** `HH:MM` of the local time at an instant. */
export function localClock(zone: string, atMs: number): string {
  return new Date(atMs + utcOffsetMs(zone, atMs)).toISOString().slice(11, 16);
}

/** Minutes since local midnight as the wall clock shows them. */
export function localMinuteOfDay(zone: string, atMs: number): number {
  const wall = toWall(zone, atMs);
  return wall.hour * 60 + wall.minute + wall.second / 60;
}

const DATE = /^(\d{4})-(\d{2})-(\d{2})$/;

/** Noon of a local date plus whole days. Throws `usage` when the date is not a calendar date. */
export function noonOf(zone: string, date: string, plusDays = 0): number {
  const match = DATE.exec(date);
  const midnight = match ? Date.UTC(Number(match[1]), Number(match[2]) - 1, Number(match[3])) : Number.NaN;
  if (!match || new Date(midnight).toISOString().slice(0, 10) !== date) {
    throw new RimeholdError('usage', `Expected a date as YYYY-MM-DD, found "${date}".`, { date });
  }
  return fromWallMs(zone, midnight + plusDays * DAY_MS + DAY_MS / 2);
}

/** A night: noon to noon local time, named by the date of its evening; 23 or 25 h long on change days. */
export interface Night {
  readonly date: string;
  readonly startMs: number;
  readonly endMs: number;
}

export function nightOf(zone: string, date: string): Night {
  return { date, startMs: noonOf(zone, date), endMs: noonOf(zone, date, 1) };
}

/** The night that an instant belongs to. */
export function nightAt(zone: string, atMs: number): Night {
  const date = localDate(zone, atMs);
  const night = nightOf(zone, date);
  return atMs >= night.startMs ? night : nightOf(zone, localDate(zone, night.startMs - DAY_MS));
}

const DURATION = /^P(?=.)(?:(\d+)W)?(?:(\d+)D)?(?:T(?=.)(?:(\d+)H)?(?:(\d+)M)?(?:(\d+(?:\.\d+)?)S)?)?$/;

/** ISO 8601 duration of weeks, days (24 h each), hours, minutes and seconds; null when it is none. */
export function parseDuration(text: string): number | null {
  const match = DURATION.exec(text);
  if (!match) return null;
  const [w, d, h, m, s] = match.slice(1).map((part) => (part === undefined ? 0 : Number(part)));
  return ((((w * 7 + d) * 24 + h) * 60 + m) * 60 + s) * 1000;
}

/** `PTxHyMzS` in whole seconds, the form that Homie knows. */
export function formatDuration(durationMs: number): string {
  const seconds = Math.max(0, Math.round(durationMs / 1000));
  const parts = [
    [Math.floor(seconds / 3600), 'H'],
    [Math.floor(seconds / 60) % 60, 'M'],
    [seconds % 60, 'S'],
  ] as const;
  const text = parts.map(([count, letter]) => (count > 0 ? `${count}${letter}` : '')).join('');
  return `PT${text || '0S'}`;
}

const RFC3339 = /^\d{4}-\d{2}-\d{2}[Tt ]\d{2}:\d{2}:\d{2}(\.\d+)?([Zz]|[+-]\d{2}:\d{2})$/;

/** The instant of an RFC 3339 timestamp; null when it is none. */
export function parseInstant(text: string): number | null {
  if (!RFC3339.test(text)) return null;
  const atMs = Date.parse(text.replace(' ', 'T').toUpperCase());
  return Number.isFinite(atMs) ? atMs : null;
}

/** RFC 3339 in UTC to the second. */
export function formatInstant(atMs: number): string {
  return `${new Date(Math.round(atMs / 1000) * 1000).toISOString().slice(0, 19)}Z`;
}

/** Start of the slot of `slotMs` that holds an instant, counted from the epoch. */
export function slotStart(atMs: number, slotMs: number): number {
  return Math.floor(atMs / slotMs) * slotMs;
}

/** Minutes from midnight of an `HH:MM` reading. */
export function minuteOfClock(clock: string): number {
  return Number(clock.slice(0, 2)) * 60 + Number(clock.slice(3, 5));
}

/** Whether a wall-clock minute lies in [from, to); `to` at or before `from` is on the next day. */
export function withinClock(minuteOfDay: number, from: string, to: string): boolean {
  const start = minuteOfClock(from);
  const end = minuteOfClock(to);
  return start < end ? minuteOfDay >= start && minuteOfDay < end : minuteOfDay >= start || minuteOfDay < end;
}
