/**
 * Hourly bins: the mean of each UTC hour of the day over the last weeks, newer days weighing more, on a prior profile
 * that fades as days are gathered (bin models: Henze, Kalz, Felsmann & Knabe 2004, HVAC&R Research 10(2)).
 */

/** Days that are looked at, and the age at which a day weighs 1/e. */
export const BIN_DAYS = 45;
const FADE_DAYS = 20;
/** The prior profile weighs as much as this many days. */
const PRIOR_DAYS = 3;
/** Hours of readings at which the prior's level has moved half the way to what is measured. */
const ANCHOR_HOURS = 3;

export const hourOfDay = (hour: number): number => ((hour % 24) + 24) % 24;

/** One value an hour; `firstHour` is the hour of `values[0]`. */
export interface HourSeries {
  readonly firstHour: number;
  readonly values: readonly (number | null)[];
}

/** Bins at the end of a series. `prior` has a value for each UTC hour of the day. */
export function hourBins(series: HourSeries, prior: readonly number[]): Float64Array {
  const { values, firstHour } = series;
  const lift = priorLift(series, prior);
  const sums = Float64Array.from(prior, (value) => (value + lift) * PRIOR_DAYS);
  const weights = new Float64Array(24).fill(PRIOR_DAYS);
  for (let i = Math.max(0, values.length - BIN_DAYS * 24); i < values.length; i += 1) {
    const value = values[i];
    if (value === null) continue;
    const weight = Math.exp((i - values.length) / 24 / FADE_DAYS);
    const bin = hourOfDay(firstHour + i);
    sums[bin] += weight * value;
    weights[bin] += weight;
  }
  return sums.map((sum, bin) => sum / weights[bin]);
}

/** How far the whole prior is to be lifted to meet the readings: a design day is not today. */
function priorLift({ values, firstHour }: HourSeries, prior: readonly number[]): number {
  let sum = 0;
  let count = 0;
  for (let i = Math.max(0, values.length - BIN_DAYS * 24); i < values.length; i += 1) {
    const value = values[i];
    if (value === null) continue;
    sum += value - prior[hourOfDay(firstHour + i)];
    count += 1;
  }
  return count === 0 ? 0 : (sum / count) * (count / (count + ANCHOR_HOURS));
}
