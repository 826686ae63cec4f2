/**
 * When did a nightly figure step to another level, and how sure is that? One step in a series with noise, outliers and weather in it.
 *
 * For each possible night of the step a least-squares model (level, slope on the weather, step) is held against the same
 * without the step; the evidence is Schwarz's approximation (Schwarz 1978, Annals of Statistics 6(2)), the nights share a prior
 * hazard, and the sum over nights gives the odds that anything changed. Outliers are winsorised first against a running
 * median, which leaves a step that lasts. Nights that follow each other are alike (slow filters, weather), so evidence is
 * shrunk by the lag-one autocorrelation, as for the effective size of an AR(1) sample (Bartlett 1946).
 */
export interface NightValue {
  readonly value: number;
  /** What the weather was, in any units, as many figures for every night; empty when there is none to take out. */
  readonly weather: readonly number[];
}

export interface ChangeOptions {
  /** Noise from night to night that is always allowed for, in units of the value. */
  readonly leastNoise: number;
  /** Steps smaller than this are of no interest. */
  readonly leastStep: number;
  /** Chance of a change in any night, before the figures are seen. */
  readonly hazardPerNight: number;
}

export interface Change {
  /** First value after the change. */
  readonly at: number;
  /** Where it may have been, 90 %. */
  readonly earliest: number;
  readonly latest: number;
  readonly step: number;
  /** Probability that the level changed at all. */
  readonly confidence: number;
}

/** Nights that a level needs before a change from it can be told, and that a new level needs to be believed. */
const LEAST_BEFORE = 7;
const LEAST_AFTER = 3;
/** Fewer nights than this tell nothing. */
export const LEAST_NIGHTS = LEAST_BEFORE + LEAST_AFTER;
/** Older nights no longer speak for the level of now. */
const WINDOW = 60;
/** Nights after the telling that still settle date and size. */
const SETTLING = 10;
const CLIP_SIGMAS = 2.5;
/** Of a step, how much must stand apart from level and weather, in nights: less, and it is the weather that is measured. */
const LEAST_FREE = 1;
/** The lag-one autocorrelation of a short series is biased low; it is never taken for less, nor for more. */
const [LEAST_RHO, MOST_RHO] = [0.1, 0.95];
/** Added to it: a standard error of its estimate in a series of sixty nights is 0.13. */
const CAREFUL_RHO = 0.1;
const SURE = 0.995;

/**
 * The first change that can be told in the series, and the night on which it could be told; null when there is none. Where more
 * nights have come since, they settle its date and size; they never take it back.
 */
export function firstChange(
  series: readonly NightValue[],
  options: ChangeOptions,
): { change: Change; toldAt: number } | null {
  for (let end = LEAST_BEFORE + LEAST_AFTER; end <= series.length; end++) {
    const change = scanUntil(series, end, options, options.leastStep);
    if (change === null || !tells(change, options)) continue;
    const later = scanUntil(series, Math.min(series.length, end + SETTLING), options);
    const settled = later !== null && tells(later, options) && later.step * change.step > 0 && later.at < end;
    return { change: settled ? later : change, toldAt: end - 1 };
  }
  return null;
}

function tells(change: Change, options: ChangeOptions): boolean {
  return change.confidence >= SURE && Math.abs(change.step) >= options.leastStep;
}

/** The scan of the last nights before `end`, in the series' own count. */
function scanUntil(
  series: readonly NightValue[],
  end: number,
  options: ChangeOptions,
  leastStep = 0,
): Change | null {
  const offset = Math.max(0, end - WINDOW);
  const change = scan(series.slice(offset, end), options, leastStep);
  if (change === null) return null;
  return {
    ...change,
    at: change.at + offset,
    earliest: change.earliest + offset,
    latest: change.latest + offset,
  };
}

/**
 * The most likely single change in a series, however unlikely; null when the series is too short, or the step smaller than
 * the caller cares for.
 */
export function scan(series: readonly NightValue[], options: ChangeOptions, leastStep = 0): Change | null {
  const n = series.length;
  if (n < LEAST_BEFORE + LEAST_AFTER) return null;
  const basis = orthonormal(series);
  const values = winsorised(
    series.map((night) => night.value),
    basis,
    options.leastNoise,
  );
  const steps = candidates(values, basis);
  if (steps.length === 0) return null;
  const best = steps.reduce((a, b) => (b.gain > a.gain ? b : a));
  if (Math.abs(best.step) < leastStep) return null;
  const left = residuals(
    values.map((value, i) => (i >= best.at ? value - best.step : value)),
    basis,
  );
  const noise2 = Math.max(squares(left) / Math.max(1, n - basis.length - 1), options.leastNoise ** 2);
  const shrink = shrinkage(left);
  // Log evidence of each candidate against no change; a parameter costs half the log of the effective sample.
  const cost = 0.5 * Math.log(Math.max(2, n * shrink));
  const logs = steps.map((step) => (step.gain / noise2) * 0.5 * shrink - cost);
  return judged(steps, logs, best, options.hazardPerNight);
}

type Basis = readonly (readonly number[])[];

/** Level and weather as orthonormal columns (Gram & Schmidt); a weather that never changes falls out. */
function orthonormal(series: readonly NightValue[]): Basis {
  const n = series.length;
  const columns = [
    series.map(() => 1),
    ...series[0].weather.map((_, j) => series.map((night) => night.weather[j])),
  ];
  const basis: number[][] = [];
  for (const column of columns) {
    const length = Math.sqrt(squares(column));
    const rest = residuals(column, basis);
    const norm = Math.sqrt(squares(rest));
    if (norm > 1e-6 * Math.max(length, n * 1e-9)) basis.push(rest.map((value) => value / norm));
  }
  return basis;
}

/** What is left of the values when every column of the basis is taken out. */
function residuals(values: readonly number[], basis: Basis): number[] {
  const left = [...values];
  for (const column of basis) {
    let along = 0;
    for (let i = 0; i < left.length; i++) along += left[i] * column[i];
    for (let i = 0; i < left.length; i++) left[i] -= along * column[i];
  }
  return left;
}

interface Candidate {
  readonly at: number;
  readonly step: number;
  /** Fall of the residual sum of squares. */
  readonly gain: number;
}

/** Every possible night of the step, in closed form from suffix sums of the residuals and of the basis. */
function candidates(values: readonly number[], basis: Basis): Candidate[] {
  const n = values.length;
  const flat = residuals(values, basis);
  const along = basis.map(() => 0);
  const out: Candidate[] = [];
  let after = 0;
  for (let at = n - 1; at >= LEAST_BEFORE; at--) {
    after += flat[at];
    for (let j = 0; j < basis.length; j++) along[j] += basis[j][at];
    if (n - at < LEAST_AFTER) continue;
    const free = n - at - squares(along);
    if (!(free > LEAST_FREE)) continue;
    out.push({ at, step: after / free, gain: (after * after) / free });
  }
  return out;
}

function judged(
  steps: readonly Candidate[],
  logs: readonly number[],
  best: Candidate,
  hazard: number,
): Change {
  const top = Math.max(...logs);
  const weights = logs.map((log) => Math.exp(log - top));
  const total = weights.reduce((sum, weight) => sum + weight, 0);
  // log of Σ hazard·evidence, turned into a probability without overflow.
  const logOdds = top + Math.log(total * hazard);
  const [earliest, latest] = interval(steps, weights, total);
  return { at: best.at, earliest, latest, step: best.step, confidence: 1 / (1 + Math.exp(-logOdds)) };
}

/** The fewest nights that hold 90 % of the weight, likeliest first. */
function interval(
  steps: readonly Candidate[],
  weights: readonly number[],
  total: number,
): [earliest: number, latest: number] {
  const order = steps
    .map((step, i) => ({ at: step.at, weight: weights[i] }))
    .toSorted((a, b) => b.weight - a.weight);
  let held = 0;
  const inside: number[] = [];
  for (const one of order) {
    inside.push(one.at);
    held += one.weight;
    if (held >= 0.9 * total) break;
  }
  return [Math.min(...inside), Math.max(...inside)];
}

/** (1 − ρ)/(1 + ρ) of the residuals' lag-one autocorrelation, corrected for its bias in a short series (Kendall 1954). */
function shrinkage(residual: readonly number[]): number {
  const all = squares(residual);
  const lagged = residual.slice(1).reduce((sum, value, i) => sum + value * residual[i], 0);
  const raw = all > 0 ? lagged / all : 0;
  const rho = Math.min(MOST_RHO, Math.max(LEAST_RHO, raw + (1 + 3 * raw) / residual.length + CAREFUL_RHO));
  return (1 - rho) / (1 + rho);
}

/** Values beyond 2.5 sigma of the running median of five nights are drawn in to there; a lasting step stays. */
function winsorised(values: readonly number[], basis: Basis, leastNoise: number): number[] {
  const flat = residuals(values, basis);
  const running = runningMedian(flat, 2);
  const off = flat.map((value, i) => value - running[i]);
  const sigma = Math.max(leastNoise, 1.4826 * median(off.map(Math.abs)));
  const most = CLIP_SIGMAS * sigma;
  return values.map((value, i) => value - off[i] + Math.max(-most, Math.min(most, off[i])));
}

/** Median of the values within `half` places of each; the window is kept in order as it moves along. */
function runningMedian(values: readonly number[], half: number): number[] {
  const window: number[] = [];
  const insert = (value: number): void => {
    let at = window.length;
    window.push(value);
    for (; at > 0 && window[at - 1] > value; at--) window[at] = window[at - 1];
    window[at] = value;
  };
  for (let i = 0; i < Math.min(half, values.length); i++) insert(values[i]);
  return values.map((_, i) => {
    if (i + half < values.length) insert(values[i + half]);
    if (i > half) window.splice(window.indexOf(values[i - half - 1]), 1);
    return middleOf(window);
  });
}

function median(values: readonly number[]): number {
  return middleOf(Float64Array.from(values).toSorted());
}

function middleOf(sorted: ArrayLike<number>): number {
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}

function squares(values: readonly number[]): number {
  let sum = 0;
  for (const value of values) sum += value * value;
  return sum;
}
