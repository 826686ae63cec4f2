/** Several Gaussian beliefs with weights: what they say together, and when they are one. */
import { STATES } from './layout.ts';
import type { Belief } from './filter.ts';
import { normalCdf } from '../numerics/normal.ts';

const N = STATES;
/** A belief this much less likely than the best (logarithm) is given up. */
const GIVEN_UP = 9;

export function weightsOf(beliefs: readonly Belief[]): number[] {
  const top = Math.max(...beliefs.map((belief) => belief.logWeight));
  const raw = beliefs.map((belief) => Math.exp(belief.logWeight - top));
  const sum = raw.reduce((a, b) => a + b, 0);
  return raw.map((weight) => weight / sum);
}

/** Drops beliefs that lost, joins pairs that agree on `index` to within `near`, and keeps weights finite. */
export function tidy(beliefs: readonly Belief[], index: number, near: number): Belief[] {
  const top = Math.max(...beliefs.map((belief) => belief.logWeight));
  const kept = beliefs.filter((belief) => belief.logWeight - top > -GIVEN_UP);
  for (const belief of kept) belief.logWeight -= top;
  kept.sort((a, b) => a.mean[index] - b.mean[index]);
  const joined: Belief[] = [];
  for (const belief of kept) {
    const last = joined.at(-1);
    if (last && Math.abs(last.mean[index] - belief.mean[index]) < near) join(last, belief);
    else joined.push(belief);
  }
  return joined;
}

/** Moment matching: `into` becomes the Gaussian with the mean and covariance of both. */
function join(into: Belief, other: Belief): void {
  const a = Math.exp(into.logWeight);
  const b = Math.exp(other.logWeight);
  const wa = a / (a + b);
  const wb = 1 - wa;
  const gap = into.mean.map((value, i) => value - other.mean[i]);
  for (let i = 0; i < N; i++) {
    for (let j = 0; j < N; j++) {
      const at = i * N + j;
      into.cov[at] = wa * into.cov[at] + wb * other.cov[at] + wa * wb * gap[i] * gap[j];
    }
  }
  for (let i = 0; i < N; i++) into.mean[i] = wa * into.mean[i] + wb * other.mean[i];
  into.logWeight = Math.log(a + b);
}

export interface Moments {
  readonly mean: number;
  readonly sd: number;
}

export interface Bell extends Moments {
  readonly weight: number;
}

export function momentsOf(bells: readonly Bell[]): Moments {
  const mean = bells.reduce((sum, bell) => sum + bell.weight * bell.mean, 0);
  const square = bells.reduce((sum, b) => sum + b.weight * (b.sd ** 2 + (b.mean - mean) ** 2), 0);
  return { mean, sd: Math.sqrt(square) };
}

/** Quantile of a mixture of normals by bisection between the outermost bells. */
export function quantileOf(bells: readonly Bell[], p: number): number {
  let low = Math.min(...bells.map((bell) => bell.mean - 6 * bell.sd));
  let high = Math.max(...bells.map((bell) => bell.mean + 6 * bell.sd));
  for (let i = 0; i < 40; i++) {
    const middle = 0.5 * (low + high);
    const below = bells.reduce((sum, b) => sum + b.weight * normalCdf((middle - b.mean) / b.sd), 0);
    if (below < p) low = middle;
    else high = middle;
  }
  return 0.5 * (low + high);
}
