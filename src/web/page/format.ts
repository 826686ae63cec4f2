/** Every figure and time of the page becomes text here. Values come in SI and °C; times are the site's own. */
import type { DisplayUnits } from '../../units.ts';
import { fromInside, shownIn } from '../../units.ts';
import type { ZoneOffset } from '../source.ts';
import { strings } from './strings.ts';

const MINUTE_MS = 60_000;
const HOUR_MS = 3_600_000;

export interface Format {
  readonly units: DisplayUnits;
  /** `21:20`. */
  clock(atMs: number): string;
  /** `21:20`, with the weekday when it is not within `nowMs` … `nowMs` + 18 h. */
  when(atMs: number, nowMs: number): string;
  /** `Tue 14 July`. */
  day(atMs: number): string;
  /** `2026-07-14` of the site. */
  date(atMs: number): string;
  /** Hours and minutes of the site since its midnight. */
  minuteOfDay(atMs: number): number;
  /** Noon of a local date plus whole days. */
  noonMs(date: string, plusDays?: number): number;
  /** The instant of the next full hour of the site after an instant. */
  nextHour(atMs: number): number;
  temperature(c: number | null): string;
  temperatureFigure(c: number): string;
  /** In the viewer's unit, unrounded; the strip draws its scale in it. */
  temperatureNumber(c: number): number;
  energyNumber(kwh: number): number;
  temperatureUnit: string;
  difference(k: number | null): string;
  /** In the viewer's degrees, unrounded. */
  degreeHours(kh: number): number;
  degreeHourUnit: string;
  energy(kwh: number | null): string;
  energyFigure(kwh: number | null, digits?: number): string;
  energyUnit: string;
  price(moneyPerKwh: number | null): string;
  money(amount: number | null): string;
  /** A value in a unit of `src/points.ts`, or in a unit of its own. */
  value(value: number | null, unit: string): string;
  /** A temperature typed by the viewer, back to °C. */
  typedTemperatureC(value: number): number;
}

export interface FormatSettings {
  readonly units: DisplayUnits;
  readonly currency: string;
  readonly offsets: readonly ZoneOffset[];
}

/** A plain figure; a true minus sign, and "not known" for null. */
export function plain(value: number | null, digits: number): string {
  if (value === null) return strings.unknown;
  const text = value.toFixed(digits);
  return (Number(text) === 0 ? text.replace('-', '') : text).replace('-', '−');
}

/** `80 minutes`, `3 h 20 min`, `2 days`. */
export function span(ms: number): string {
  const minutes = Math.round(Math.abs(ms) / MINUTE_MS);
  if (minutes < 120) return strings.minutes(minutes);
  if (minutes >= 48 * 60) return strings.days(Math.round(minutes / 1440));
  return strings.hoursMinutes(Math.floor(minutes / 60), minutes % 60);
}

/** Age in one unit: `12 s`, `4 min`, `3 h`, `2 days`. */
export function age(ms: number | null): string {
  if (ms === null) return strings.unknown;
  if (ms < 90_000) return strings.secondsShort(Math.round(ms / 1000));
  if (ms < 2 * HOUR_MS) return strings.minutesShort(Math.round(ms / MINUTE_MS));
  return ms < 48 * HOUR_MS
    ? strings.hoursShort(Math.round(ms / HOUR_MS))
    : strings.days(Math.round(ms / (24 * HOUR_MS)));
}

const two = (value: number): string => String(value).padStart(2, '0');

/** `42:10`, `1:42:10`. */
export function countdown(ms: number): string {
  const seconds = Math.max(0, Math.ceil(ms / 1000));
  const hours = Math.floor(seconds / 3600);
  const rest = `${two(Math.floor(seconds / 60) % 60)}:${two(seconds % 60)}`;
  return hours > 0 ? `${hours}:${rest}` : rest;
}

function shown(value: number, unit: string, units: DisplayUnits): { figure: string; unit: string } {
  const as = shownIn(value, unit, units);
  return { figure: plain(as.value, as.digits), unit: as.unit };
}

const offsetAt = (offsets: readonly ZoneOffset[], atMs: number): number =>
  (offsets.findLast((row) => row.fromMs <= atMs) ?? offsets[0])?.offsetMs ?? 0;

type TimeFormat = Pick<Format, 'clock' | 'when' | 'day' | 'date' | 'minuteOfDay' | 'noonMs' | 'nextHour'>;

function timeFormat(offsets: readonly ZoneOffset[]): TimeFormat {
  const wall = (atMs: number): Date => new Date(atMs + offsetAt(offsets, atMs));
  const clock = (atMs: number): string => wall(atMs).toISOString().slice(11, 16);
  const weekday = (atMs: number): string => strings.weekdays[wall(atMs).getUTCDay()];
  return {
    clock,
    when: (atMs, nowMs) =>
      atMs >= nowMs - 6 * HOUR_MS && atMs <= nowMs + 18 * HOUR_MS
        ? clock(atMs)
        : `${weekday(atMs)} ${clock(atMs)}`,
    day: (atMs) =>
      strings.day(weekday(atMs), wall(atMs).getUTCDate(), strings.months[wall(atMs).getUTCMonth()]),
    date: (atMs) => wall(atMs).toISOString().slice(0, 10),
    minuteOfDay: (atMs) => wall(atMs).getUTCHours() * 60 + wall(atMs).getUTCMinutes(),
    noonMs: (date, plusDays = 0) => {
      const wallMs = Date.parse(`${date}T12:00:00Z`) + plusDays * 24 * HOUR_MS;
      return wallMs - offsetAt(offsets, wallMs - offsetAt(offsets, wallMs));
    },
    nextHour: (atMs) => {
      const offsetMs = offsetAt(offsets, atMs);
      return (Math.floor((atMs + offsetMs) / HOUR_MS) + 1) * HOUR_MS - offsetMs;
    },
  };
}

export function createFormat({ units, currency, offsets }: FormatSettings): Format {
  const energyFactor = units === 'SI' ? 1 : (fromInside(1, 'BTU', 'energy') ?? 0) / 1000;
  const energyUnit = units === 'SI' ? 'kWh' : 'kBTU';
  const energyFigure = (kwh: number | null, digits = 1): string =>
    plain(kwh === null ? null : kwh * energyFactor, digits);
  const known = (value: number | null, unit: string): string => {
    if (value === null) return strings.unknown;
    const text = shown(value, unit, units);
    return text.unit ? `${text.figure} ${text.unit}` : text.figure;
  };
  const value = (raw: number | null, unit: string): string =>
    raw !== null && unit === 'true/false' ? strings.truth(raw !== 0) : known(raw, unit);
  return {
    units,
    ...timeFormat(offsets),
    temperature: (c) => known(c, 'degC'),
    temperatureFigure: (c) => shown(c, 'degC', units).figure,
    temperatureNumber: (c) => (units === 'SI' ? c : c * 1.8 + 32),
    energyNumber: (kwh) => kwh * energyFactor,
    temperatureUnit: shownIn(0, 'degC', units).unit,
    difference: (k) => known(k, 'K'),
    degreeHours: (kh) => (units === 'SI' ? kh : kh * 1.8),
    degreeHourUnit: units === 'SI' ? 'K·h' : '°F·h',
    energy: (kwh) => (kwh === null ? strings.unknown : `${energyFigure(kwh)} ${energyUnit}`),
    energyFigure,
    energyUnit,
    price: (moneyPerKwh) =>
      moneyPerKwh === null ? strings.unknown : `${plain(moneyPerKwh, 2)} ${currency}/kWh`,
    money: (amount) => (amount === null ? strings.unknown : `${plain(amount, 2)} ${currency}`),
    value,
    typedTemperatureC: (typed) => (units === 'SI' ? typed : ((typed - 32) * 5) / 9),
  };
}

/** A calendar date as people write it: `Tue 14 July`. Needs no zone. */
export function calendarDay(date: string): string {
  const day = new Date(`${date}T00:00:00Z`);
  return strings.day(strings.weekdays[day.getUTCDay()], day.getUTCDate(), strings.months[day.getUTCMonth()]);
}

/** A date some days later or earlier. */
export function shiftDate(date: string, days: number): string {
  return new Date(Date.parse(`${date}T00:00:00Z`) + days * 24 * HOUR_MS).toISOString().slice(0, 10);
}

/** `July 2026` of a date or of the month that it begins with. */
export function calendarMonth(date: string): string {
  return `${strings.months[Number(date.slice(5, 7)) - 1]} ${date.slice(0, 4)}`;
}

/** RFC 3339 in UTC, for questions to the daemon. */
export function instant(atMs: number): string {
  return `${new Date(atMs).toISOString().slice(0, 19)}Z`;
}
