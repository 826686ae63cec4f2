/** How a site shows its figures: SI or the inch-pound units of the trade, money by currency, local time. */
import { localClock, localDate, parseInstant, toWall } from '../time.ts';
import { fromInside, shownIn as shownFigure, type Dimension, type DisplayUnits } from '../units.ts';

export interface Display {
  /** Heat and cold; electricity stays in kWh whatever the units. */
  readonly heatUnit: string;
  heat(kwh: number): string;
  readonly massUnit: string;
  mass(kg: number): string;
  readonly temperatureUnit: string;
  temperature(celsius: number): string;
  readonly differenceUnit: string;
  difference(kelvin: number, decimals?: number): string;
  readonly degreeHourUnit: string;
  degreeHours(kelvinHours: number): string;
  readonly conductanceUnit: string;
  conductance(wattsPerKelvin: number): string;
  /** A learned figure in the site's units. */
  figure(value: number, unit: string): { readonly value: number; readonly unit: string };
  readonly currency: string;
  money(amount: number): string;
  price(perKwh: number): string;
  clock(instant: string): string;
  /** "Tuesday 14 July 2026". */
  day(instant: string): string;
  /** "14 July 2026". */
  date(instant: string): string;
}

const WEEKDAYS = ['Sunday', 'Monday', 'Tuesday', 'Wednesday', 'Thursday', 'Friday', 'Saturday'] as const;
const MONTHS = [
  'January',
  'February',
  'March',
  'April',
  'May',
  'June',
  'July',
  'August',
  'September',
  'October',
  'November',
  'December',
] as const;

/** A number with a fixed count of decimals; a minus is a real minus sign, and nothing shows as "-0.0". */
export function fixed(value: number, decimals: number): string {
  const text = value.toFixed(decimals);
  const isZero = Number(text) === 0;
  return isZero ? text.replace('-', '') : text.replace('-', '\u2212');
}

/** Fewer decimals on larger figures, so that columns stay narrow: 9.87, 98.76, 987.6, 9876. */
export function figures(value: number, decimals: number): string {
  const size = Math.abs(value);
  return fixed(value, Math.max(0, decimals - (size >= 1000 ? 2 : size >= 100 ? 1 : 0)));
}

export function displayFor(site: { units: DisplayUnits; currency: string; zone: string }): Display {
  const ip = site.units === 'IP';
  const digits = minorDigits(site.currency);
  return {
    heatUnit: ip ? 'kBTU' : 'kWh',
    heat: (kwh) => (ip ? figures(shownIn(kwh, 'BTU', 'energy') / 1000, 1) : figures(kwh, 2)),
    massUnit: ip ? 'lb' : 'kg',
    mass: (kg) => (ip ? fixed(shownIn(kg, 'lb', 'mass'), 0) : fixed(kg, 1)),
    temperatureUnit: ip ? '\u00b0F' : '\u00b0C',
    temperature: (celsius) => fixed(ip ? shownIn(celsius, 'degF', 'temperature') : celsius, 1),
    differenceUnit: ip ? '\u00b0F' : 'K',
    difference: (kelvin, decimals = 1) => fixed(ip ? kelvin * 1.8 : kelvin, decimals),
    degreeHourUnit: ip ? '\u00b0F h' : 'K h',
    degreeHours: (kelvinHours) => fixed(ip ? kelvinHours * 1.8 : kelvinHours, 1),
    conductanceUnit: ip ? 'BTU/(h \u00b0F)' : 'W/K',
    conductance: (wattsPerKelvin) =>
      fixed(ip ? shownIn(wattsPerKelvin, 'BTU/(h degF)', 'conductance') : wattsPerKelvin, 2),
    figure: (value, unit) => shownFigure(value, unit, site.units),
    currency: site.currency,
    money: (amount) => fixed(amount, digits),
    price: (perKwh) => fixed(perKwh, digits + 1),
    clock: (instant) => localClock(site.zone, msOf(instant)),
    day: (instant) =>
      `${WEEKDAYS[toWall(site.zone, msOf(instant)).weekday]} ${dateWords(site.zone, msOf(instant))}`,
    date: (instant) => dateWords(site.zone, msOf(instant)),
  };
}

function shownIn(value: number, unit: string, dimension: Dimension): number {
  return fromInside(value, unit, dimension) ?? value;
}

function msOf(instant: string): number {
  return parseInstant(instant) ?? 0;
}

/** Decimals of a currency: two for most, none for yen. */
export function minorDigits(currency: string): number {
  return (
    new Intl.NumberFormat('en', { style: 'currency', currency }).resolvedOptions().maximumFractionDigits ?? 2
  );
}

function dateWords(zone: string, atMs: number): string {
  const wall = toWall(zone, atMs);
  return `${wall.day} ${MONTHS[wall.month - 1]} ${wall.year}`;
}

/** "July 2026" of a local month given as `YYYY-MM`. */
export function monthWords(month: string): string {
  const [year, number] = month.split('-');
  return `${MONTHS[Number(number) - 1]} ${year}`;
}

export function monthOf(zone: string, atMs: number): string {
  return localDate(zone, atMs).slice(0, 7);
}
