import { describe, expect, it } from 'vitest';
import { ensembleQuantile } from '../../src/forecasting/ensemble.ts';
import { coverage, crps, cvRmsePct, nmbePct, pinball } from '../../src/forecasting/scores.ts';
import { createRandom } from '../../src/numerics/random.ts';

const random = createRandom(4);
const normals = (count: number, sd = 1): number[] =>
  Array.from({ length: count }, () => sd * random.normal());
const mean = (values: readonly number[]): number => values.reduce((sum, v) => sum + v, 0) / values.length;

describe('continuous ranked probability score', () => {
  it('is the absolute error of a single member', () => expect(crps([3], 5)).toBe(2));

  it('comes to a hand-worked value: members 0 and 2, observed 3', () => {
    // E|X − y| = (3 + 1)/2 = 2; E|X − X′| = (0 + 2 + 2 + 0)/4 = 1; 2 − ½ = 1.5
    expect(crps([2, 0], 3)).toBeCloseTo(1.5, 12);
  });

  it.each([
    // Gneiting & Raftery 2007, JASA 102(477), eq. 22: σ [z (2Φ(z) − 1) + 2 φ(z) − 1/√π], worked with Φ and φ tables
    [0, 0.23369],
    [1, 0.60244],
    [2, 1.45279],
  ])('of a standard normal at %d is %d', (observed, published) => {
    const quantiles = Float64Array.from({ length: 1000 }, (_, i) => normalQuantile((i + 0.5) / 1000));
    expect(crps(quantiles, observed)).toBeCloseTo(published, 3);
  });

  it('counts weights like repeated members', () => {
    expect(crps([1, 4, 6], 3, [2, 1, 1])).toBeCloseTo(crps([1, 1, 4, 6], 3), 12);
  });

  it('is proper: on average the true distribution scores best', () => {
    const observed = normals(400);
    const score = (sd: number, shift: number): number =>
      mean(
        observed.map((y) =>
          crps(
            normals(60, sd).map((x) => x + shift),
            y,
          ),
        ),
      );
    const right = score(1, 0);
    for (const [sd, shift] of [
      [0.4, 0],
      [2.2, 0],
      [1, 0.8],
    ])
      expect(score(sd, shift)).toBeGreaterThan(right);
  });
});

/** Inverse of Φ by bisection. */
function normalQuantile(p: number): number {
  let [low, high] = [-8, 8];
  for (let i = 0; i < 60; i += 1) {
    const middle = (low + high) / 2;
    if (normalBelow(middle) < p) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

/** Φ by the series of Abramowitz & Stegun 1964, eq. 26.2.11. */
function normalBelow(x: number): number {
  let term = x;
  let sum = x;
  for (let n = 1; Math.abs(term) > 1e-16 * Math.abs(sum); n += 1) {
    term *= (x * x) / (2 * n + 1);
    sum += term;
  }
  return 0.5 + (Math.exp((-x * x) / 2) / Math.sqrt(2 * Math.PI)) * sum;
}

describe('other scores, worked by hand', () => {
  it('pinball: too low costs p, too high costs 1 − p', () => {
    expect(pinball(4, 6, 0.9)).toBeCloseTo(1.8, 12);
    expect(pinball(6, 4, 0.9)).toBeCloseTo(0.2, 12);
  });
  it('coverage counts closed intervals', () => {
    expect(coverage([0, 0, 0, 0], [1, 1, 1, 1], [0, 1, 1.01, 0.5])).toBe(0.75);
    expect(coverage([], [], [])).toBeNull();
  });
  it('CV(RMSE) and NMBE as ASHRAE Guideline 14-2014 defines them', () => {
    // errors 1, −1, 3 on observations 9, 11, 10: RMSE √(11/3) = 1.91485, mean 10
    expect(cvRmsePct([10, 10, 13], [9, 11, 10])).toBeCloseTo(19.1485, 3);
    expect(cvRmsePct([10, 10, 13], [9, 11, 10], 1)).toBeCloseTo(23.4521, 3);
    expect(nmbePct([10, 10, 13], [9, 11, 10])).toBeCloseTo(10, 12);
    expect(cvRmsePct([1], [0])).toBeNull();
    expect(nmbePct([1], [Number.NaN])).toBeNull();
  });
});

describe('quantiles of an ensemble', () => {
  it('cover what they say when what comes is another draw', () => {
    let inside = 0;
    for (let trial = 0; trial < 4000; trial += 1) {
      const members = normals(20);
      const came = random.normal();
      if (came >= ensembleQuantile(members, 0.1) && came <= ensembleQuantile(members, 0.9)) inside += 1;
    }
    // binomial standard error 0.6 %
    expect(inside / 4000).toBeGreaterThan(0.78);
    expect(inside / 4000).toBeLessThan(0.82);
  });
  it('stay within the members', () => {
    expect(ensembleQuantile([3, 1, 2], 0.01)).toBe(1);
    expect(ensembleQuantile([3, 1, 2], 0.99)).toBe(3);
    expect(ensembleQuantile([3, 1, 2], 0.5)).toBe(2);
    expect(ensembleQuantile([7], 0.9)).toBe(7);
  });
});
