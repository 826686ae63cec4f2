/**
 * Clearness as a score: where it stands among what this hour of the day has had lately, on the scale of a normal
 * deviate. Clearness itself heaps up at a clear sky and has a long tail below, so a mean with errors on it would promise
 * skies that never come; scores persist and err evenly, and each is turned back into a clearness that was seen (normal
 * scores: van der Waerden 1952; the same transform before an autoregression: Graham & Hollands 1990, Solar Energy 44(6)).
 */
import { normalQuantile } from '../numerics/normal.ts';
import { hourOfDay, type HourSeries } from './bins.ts';
import { MOST_CLEARNESS } from './sky.ts';

/** Days that are looked at, and the age at which a day weighs 1/e. */
const LOOK_DAYS = 45;
const FADE_DAYS = 20;
/** What a neighbouring hour weighs beside the hour itself. */
const BESIDE = 0.5;
/** A usual summer sky, evenly likely, with the weight of this many days: it speaks until the site does. From memory. */
const USUAL: readonly number[] = [0.25, 0.45, 0.65, 0.8, 0.9, 0.95, 0.99, 1];
const USUAL_DAYS = 1;
/** A sky a little clearer or darker than any seen, and how much further out its score is. */
const BEYOND = 0.03;
const BEYOND_SCORE = 0.5;

/** A curve from score to clearness, both rising. */
interface Curve {
  readonly clearness: Float64Array;
  readonly score: Float64Array;
}

export interface SkyScores {
  scoreOf(hour: number, clearness: number): number;
  clearnessOf(hour: number, score: number): number;
}

/** Learned from the series up to its end. Hours are since the epoch. */
export function skyScores(series: HourSeries): SkyScores {
  const curves = Array.from({ length: 24 }, (_, hour) => curveOf(series, hour));
  return {
    scoreOf: (hour, clearness) => {
      const curve = curves[hourOfDay(hour)];
      return along(curve.clearness, curve.score, clearness);
    },
    clearnessOf: (hour, score) => {
      const curve = curves[hourOfDay(hour)];
      return along(curve.score, curve.clearness, score);
    },
  };
}

export function scored(series: HourSeries, scores: SkyScores): HourSeries {
  const { firstHour, values } = series;
  return {
    firstHour,
    values: values.map((value, i) => (value === null ? null : scores.scoreOf(firstHour + i, value))),
  };
}

function curveOf({ firstHour, values }: HourSeries, hour: number): Curve {
  const seen = USUAL.map((clearness) => ({ clearness, weight: USUAL_DAYS / USUAL.length }));
  for (let i = Math.max(0, values.length - LOOK_DAYS * 24); i < values.length; i += 1) {
    const clearness = values[i];
    const apart = (firstHour + i - hour + 36) % 24;
    if (clearness === null || Math.abs(apart - 12) > 1) continue;
    const age = Math.exp((i - values.length) / 24 / FADE_DAYS);
    seen.push({ clearness, weight: (apart === 12 ? 1 : BESIDE) * age });
  }
  return steps(seen.toSorted((a, b) => a.clearness - b.clearness));
}

/** Values of one kind share one step; each stands at the middle of its weight. */
function steps(sorted: readonly { readonly clearness: number; readonly weight: number }[]): Curve {
  const total = sorted.reduce((sum, { weight }) => sum + weight, 0);
  const clearness: number[] = [];
  const score: number[] = [];
  let below = 0;
  for (let i = 0; i < sorted.length;) {
    const value = sorted[i].clearness;
    let weight = 0;
    for (; i < sorted.length && sorted[i].clearness === value; i += 1) weight += sorted[i].weight;
    clearness.push(value);
    score.push(normalQuantile((below + weight / 2) / total));
    below += weight;
  }
  const last = clearness.length - 1;
  return {
    clearness: Float64Array.from([
      Math.max(0, clearness[0] - BEYOND),
      ...clearness,
      Math.min(MOST_CLEARNESS, clearness[last] + BEYOND),
    ]),
    score: Float64Array.from([score[0] - BEYOND_SCORE, ...score, score[last] + BEYOND_SCORE]),
  };
}

/** Linear between the points, held at the ends. */
function along(xs: Float64Array, ys: Float64Array, x: number): number {
  let low = 0;
  let high = xs.length - 1;
  if (!(x > xs[low])) return ys[low];
  if (x >= xs[high]) return ys[high];
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (xs[middle] <= x) low = middle;
    else high = middle;
  }
  return ys[low] + ((ys[high] - ys[low]) * (x - xs[low])) / (xs[high] - xs[low]);
}
