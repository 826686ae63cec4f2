/** Forecasts beside what came, the baselines that they are held against, and their scores. */
import { ensembleQuantile } from '../../src/forecasting/ensemble.ts';
import { coverage, crps, cvRmsePct, nmbePct } from '../../src/forecasting/scores.ts';

export interface Pair {
  readonly lead: number;
  readonly members: Float64Array;
  readonly observed: number;
  readonly yesterday: number;
  readonly bins: readonly number[];
}

export const meanOf = (values: ArrayLike<number>): number =>
  Array.from(values).reduce((sum, v) => sum + v, 0) / values.length;

export function hourly(quarters: readonly number[]): number[] {
  return Array.from({ length: Math.floor(quarters.length / 4) }, (_, hour) =>
    meanOf(quarters.slice(hour * 4, hour * 4 + 4)),
  );
}

/** `now` and `target` are hours; nothing at or after `now` is known. */
export function baselines(
  byHour: readonly number[],
  now: number,
  target: number,
): { yesterday: number; bins: number[] } {
  let back = target - 24;
  while (back >= now) back -= 24;
  const bins: number[] = [];
  for (let at = back; at >= 0 && bins.length < 30; at -= 24) bins.push(byHour[at]);
  return { yesterday: byHour[back], bins };
}

export const baselineCvRmsePct = (pairs: readonly Pair[], forecast: (pair: Pair) => number): number =>
  cvRmsePct(
    pairs.map(forecast),
    pairs.map((pair) => pair.observed),
  ) ?? -1;

interface Score {
  readonly cvRmsePct: number;
  readonly nmbePct: number;
  readonly skillVsYesterdayPct: number;
  readonly skillVsBinsPct: number;
  readonly coverage80Pct: number;
  readonly crps: number;
}

export function scoreOf(pairs: readonly Pair[]): Score {
  const observed = pairs.map((pair) => pair.observed);
  const means = pairs.map((pair) => meanOf(pair.members));
  const mean = (score: (pair: Pair) => number): number => meanOf(pairs.map(score));
  const own = mean((pair) => crps(pair.members, pair.observed));
  const yesterday = mean((pair) => Math.abs(pair.yesterday - pair.observed));
  const bins = mean((pair) => crps(pair.bins, pair.observed));
  const inside = coverage(
    pairs.map((pair) => ensembleQuantile(pair.members, 0.1)),
    pairs.map((pair) => ensembleQuantile(pair.members, 0.9)),
    observed,
  );
  return {
    cvRmsePct: cvRmsePct(means, observed) ?? -1,
    nmbePct: nmbePct(means, observed) ?? -1,
    skillVsYesterdayPct: 100 * (1 - own / yesterday),
    skillVsBinsPct: 100 * (1 - own / bins),
    coverage80Pct: 100 * (inside ?? -1),
    crps: own,
  };
}

export function rowOf(name: string, pairs: readonly Pair[]): (string | number)[] {
  const score = scoreOf(pairs);
  return [
    name,
    pairs.length,
    meanOf(pairs.map((pair) => pair.observed)),
    score.cvRmsePct,
    score.nmbePct,
    score.skillVsYesterdayPct,
    score.skillVsBinsPct,
    score.coverage80Pct,
  ];
}
