/** Figures as the owner of a site reads them: its clock, its currency, its units. */
import { localClock, localDate, toWall, DAY_MS } from '../time.ts';
import { fromInside } from '../units.ts';
import type { PlanProblem } from './problem.ts';

/** What words need to know of a site. */
export type Manner = Pick<PlanProblem, 'zone' | 'currency' | 'units'>;

const HUNDREDTHS: Readonly<Record<string, string>> = { EUR: 'ct', USD: '¢', GBP: 'p', AUD: '¢', CAD: '¢' };

/** A price of a kWh, in hundredths where the currency has a common word for them: "11 ct". */
export function priceText(manner: Manner, moneyPerKwh: number): string {
  const word = HUNDREDTHS[manner.currency];
  if (word === undefined) return `${moneyPerKwh.toFixed(2)} ${manner.currency}`;
  const hundredths = moneyPerKwh * 100;
  const figure = Math.abs(hundredths) < 9.95 ? trimmed(hundredths.toFixed(1)) : hundredths.toFixed(0);
  return `${figure} ${word}`;
}

/** An amount of money: "8 ct", "1.20 EUR". */
export function moneyText(manner: Manner, money: number): string {
  const word = HUNDREDTHS[manner.currency];
  if (word !== undefined && Math.abs(money) < 0.995) return `${(money * 100).toFixed(0)} ${word}`;
  return `${money.toFixed(2)} ${manner.currency}`;
}

const trimmed = (figure: string): string => figure.replace(/\.0$/, '');

/** Ice or cooling, as on the sheet: "6.1 kWh", "20.8 kBTU". */
export function energyText(manner: Manner, kwh: number): string {
  if (manner.units === 'SI') return `${kwh.toFixed(1)} kWh`;
  const btu = fromInside(kwh, 'BTU', 'energy') ?? 0;
  return `${(btu / 1000).toFixed(1)} kBTU`;
}

/** The bare figure of `energyText`, where the unit was said just before. */
export function energyFigure(manner: Manner, kwh: number): string {
  return energyText(manner, kwh).replace(/ .*$/, '');
}

export function temperatureText(manner: Manner, celsius: number): string {
  if (manner.units === 'SI') return `${celsius.toFixed(0)} °C`;
  return `${(fromInside(celsius, 'degF', 'temperature') ?? 0).toFixed(0)} °F`;
}

export function powerText(manner: Manner, watts: number): string {
  if (manner.units === 'IP') return `${(watts / 1000).toFixed(1)} kW`;
  return watts < 995 ? `${(Math.round(watts / 10) * 10).toFixed(0)} W` : `${(watts / 1000).toFixed(1)} kW`;
}

const WEEKDAYS = ['Sunday', 'Monday', 'Tuesday', 'Wednesday', 'Thursday', 'Friday', 'Saturday'];

/** A time as seen from now: "03:15", "17:00 tomorrow", "17:00 on Friday". The coming night needs no day. */
export function clockText(manner: Manner, nowMs: number, atMs: number): string {
  const clock = localClock(manner.zone, atMs);
  const today = localDate(manner.zone, nowMs);
  const day = localDate(manner.zone, atMs);
  if (day === today || atMs - nowMs < DAY_MS / 2) return clock;
  if (day === localDate(manner.zone, nowMs + DAY_MS)) return `${clock} tomorrow`;
  return `${clock} on ${WEEKDAYS[toWall(manner.zone, atMs).weekday]}`;
}
