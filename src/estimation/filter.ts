/**
 * One Gaussian belief over the state and its recursion: divided-difference prediction (Nørgaard, Poulsen & Ravn 2000,
 * "New developments in state estimation for nonlinear systems", Automatica 36:1627–1638, first order), which spreads
 * the belief by one standard deviation along the columns of its Cholesky factor, and scalar corrections one by one.
 * Phase boundaries are then felt as far as the belief reaches, not only at its centre.
 */
import { DYNAMIC, STATES, type Priors } from './layout.ts';
import { normalCdf } from '../numerics/normal.ts';

export interface Belief {
  /** Logarithm of the weight of this belief among others. */
  logWeight: number;
  readonly mean: Float64Array;
  /** Covariance, row by row. */
  readonly cov: Float64Array;
}

const N = STATES;

export function beliefFrom(mean: ArrayLike<number>, sd: ArrayLike<number>): Belief {
  const cov = new Float64Array(N * N);
  for (let i = 0; i < N; i++) cov[i * N + i] = sd[i] ** 2;
  return { logWeight: 0, mean: Float64Array.from(mean), cov };
}

export const sdOf = (belief: Belief, i: number): number => Math.sqrt(Math.max(0, belief.cov[i * N + i]));

/** Working arrays, shared by all beliefs of one estimator. */
export interface Workspace {
  readonly factor: Float64Array;
  readonly columns: Float64Array;
  readonly plus: Float64Array;
  readonly minus: Float64Array;
  readonly gradient: Float64Array;
  readonly gain: Float64Array;
}

export function newWorkspace(): Workspace {
  return {
    factor: new Float64Array(N * N),
    columns: new Float64Array(N * N),
    plus: new Float64Array(N),
    minus: new Float64Array(N),
    gradient: new Float64Array(N),
    gain: new Float64Array(N),
  };
}

/** Cholesky factor; a pivot that rounding made too small is lifted, which only widens the belief. */
export function factorise(cov: Float64Array, factor: Float64Array): void {
  for (let i = 0; i < N; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = cov[i * N + j];
      for (let k = 0; k < j; k++) sum -= factor[i * N + k] * factor[j * N + k];
      if (i === j) factor[i * N + i] = Math.sqrt(sum > 1e-12 ? sum : 1e-12);
      else factor[i * N + j] = sum / factor[j * N + j];
    }
    for (let j = i + 1; j < N; j++) factor[i * N + j] = 0;
  }
}

/** Moves the belief through `step` (in place on a state vector) and adds the noise variances. */
export function predict(
  belief: Belief,
  step: (x: Float64Array) => void,
  noise: Float64Array,
  work: Workspace,
): void {
  const { factor, columns, plus, minus } = work;
  factorise(belief.cov, factor);
  for (let j = 0; j < N; j++) {
    // Nothing to spread by: a quantity that this form of bank does not have, or that only shows in readings.
    if (j >= DYNAMIC || factor[j * N + j] <= 2e-6) {
      for (let i = 0; i < N; i++) columns[i * N + j] = factor[i * N + j];
      continue;
    }
    for (let i = 0; i < N; i++) {
      plus[i] = belief.mean[i] + factor[i * N + j];
      minus[i] = belief.mean[i] - factor[i * N + j];
    }
    step(plus);
    step(minus);
    for (let i = 0; i < N; i++) columns[i * N + j] = 0.5 * (plus[i] - minus[i]);
  }
  step(belief.mean);
  multiply(columns, belief.cov);
  for (let i = 0; i < N; i++) belief.cov[i * N + i] += noise[i];
}

/** cov = columns · columnsᵀ. */
function multiply(columns: Float64Array, cov: Float64Array): void {
  for (let i = 0; i < N; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = 0;
      for (let k = 0; k < N; k++) sum += columns[i * N + k] * columns[j * N + k];
      cov[i * N + j] = sum;
      cov[j * N + i] = sum;
    }
  }
}

/** Slow quantities drift back to their priors. */
export function forget(belief: Belief, priors: Priors, from: number, dtS: number, keep: Float64Array): void {
  for (let i = 0; i < N; i++) keep[i] = i < from ? 1 : Math.exp(-dtS / priors.forgetS[i]);
  for (let i = from; i < N; i++) {
    belief.mean[i] = priors.mean[i] + keep[i] * (belief.mean[i] - priors.mean[i]);
  }
  for (let i = 0; i < N; i++) {
    for (let j = 0; j < N; j++) belief.cov[i * N + j] *= keep[i] * keep[j];
  }
  for (let i = from; i < N; i++) belief.cov[i * N + i] += (1 - keep[i] ** 2) * priors.sd[i] ** 2;
}

/** A quantity that a reading depends on: the states it feels, and what it would read. */
export interface Sense {
  readonly states: readonly number[];
  predict(x: Float64Array): number;
}

export interface Innovation {
  readonly innovation: number;
  /** Variance of the innovation, reading noise included, before any widening. */
  readonly variance: number;
}

/** What a reading would be and how far off it is, without learning from it. */
export function foresee(
  belief: Belief,
  sense: Sense,
  value: number,
  noise: number,
  work: Workspace,
): Innovation {
  const { gradient, plus, gain } = work;
  plus.set(belief.mean);
  gradient.fill(0);
  for (const i of sense.states) {
    const reach = Math.max(1e-6, sdOf(belief, i));
    plus[i] = belief.mean[i] + reach;
    const above = sense.predict(plus);
    plus[i] = belief.mean[i] - reach;
    const below = sense.predict(plus);
    plus[i] = belief.mean[i];
    gradient[i] = (above - below) / (2 * reach);
  }
  let variance = noise;
  for (let i = 0; i < N; i++) {
    let sum = 0;
    for (const j of sense.states) sum += belief.cov[i * N + j] * gradient[j];
    gain[i] = sum;
    variance += gradient[i] * sum;
  }
  return { innovation: value - sense.predict(belief.mean), variance };
}

/** Standard deviations beyond which an innovation counts as a disturbance rather than news. */
const HUBER = 2.5;

/**
 * Learns from one reading. Beyond `HUBER` deviations the noise is taken to be larger, so that no single reading moves
 * the belief by more than that many of its own deviations (Huber 1964). Gives the innovation as it came.
 */
export function correct(
  belief: Belief,
  sense: Sense,
  value: number,
  noise: number,
  work: Workspace,
): Innovation {
  const found = foresee(belief, sense, value, noise, work);
  if (!(found.variance > 0) || !Number.isFinite(found.innovation)) return found;
  const widened = Math.max(found.variance, (found.innovation / HUBER) ** 2);
  const { gain } = work;
  for (let i = 0; i < N; i++) {
    const share = gain[i] / widened;
    belief.mean[i] += share * found.innovation;
    for (let j = 0; j <= i; j++) {
      const reduced = belief.cov[i * N + j] - share * gain[j];
      belief.cov[i * N + j] = reduced;
      belief.cov[j * N + i] = reduced;
    }
  }
  return found;
}

/** Standard normal density. */
const density = (z: number): number => Math.exp(-0.5 * z * z) / Math.sqrt(2 * Math.PI);

/**
 * A quantity is known to lie on one side of a limit: the belief becomes the normal with the mean and variance of what
 * is left of it (Simon & Simon 2010, "Constrained Kalman filtering via density function truncation", Int. J. Systems
 * Science 41:159–171). Only a belief whose mean lies beyond is touched, so that saying it again takes nothing more
 * away. `softness` is the spread of the limit itself. Gives the logarithm of the share of the belief that was left.
 */
export function truncate(
  belief: Belief,
  i: number,
  limit: number,
  side: 'at-least' | 'at-most',
  softness: number,
): number {
  const sign = side === 'at-most' ? 1 : -1;
  const beyond = sign * (belief.mean[i] - limit);
  if (!(beyond > 0)) return 0;
  const variance = belief.cov[i * N + i];
  const sd = Math.sqrt(variance + softness * softness);
  const z = Math.max(-4, -beyond / sd);
  const left = Math.max(1e-5, normalCdf(z));
  const ratio = density(z) / left;
  const share = variance / (sd * sd);
  const step = (-sign * sd * ratio * share) / variance;
  const shrink = (share * ratio * (ratio + z)) / variance;
  const column = Float64Array.from({ length: N }, (_, k) => belief.cov[k * N + i]);
  for (let k = 0; k < N; k++) {
    belief.mean[k] += step * column[k];
    for (let j = 0; j < N; j++) belief.cov[k * N + j] -= shrink * column[k] * column[j];
  }
  return Math.log(left);
}
