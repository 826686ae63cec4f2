import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { quantile, weightedQuantile } from '../../src/numerics/quantile.ts';

const ONE_TO_TEN = [10, 1, 9, 2, 8, 3, 7, 4, 6, 5];
const EQUAL = ONE_TO_TEN.map(() => 0.7);
const sample = fc.array(fc.double({ min: -1e6, max: 1e6, noNaN: true }), { minLength: 1, maxLength: 30 });
const probability = fc.double({ min: 0, max: 1, noNaN: true });

describe('quantile', () => {
  it.each([
    [0, 1],
    [0.1, 1.9],
    [0.25, 3.25],
    [0.5, 5.5],
    [0.9, 9.1],
    [1, 10],
  ])('is definition 7 of Hyndman & Fan 1996: p = %d of 1…10 gives %d', (p, expected) => {
    expect(quantile(ONE_TO_TEN, p)).toBeCloseTo(expected, 12);
  });

  it('grows with p and stays within the sample', () => {
    fc.assert(
      fc.property(sample, probability, probability, (values, p, q) => {
        const [low, high] = [quantile(values, Math.min(p, q)), quantile(values, Math.max(p, q))];
        expect(low <= high + 1e-9).toBe(true);
        expect(low).toBeGreaterThanOrEqual(Math.min(...values));
        expect(high).toBeLessThanOrEqual(Math.max(...values));
      }),
    );
  });

  it('does not change its input', () => {
    const values = [3, 1, 2];
    quantile(values, 0.5);
    expect(values).toEqual([3, 1, 2]);
  });

  it.each([
    ['an empty sample', [], 0.5],
    ['NaN in the sample', [1, Number.NaN], 0.5],
    ['p above 1', [1], 1.1],
    ['p that is no number', [1], Number.NaN],
  ])('refuses %s', (_what, values, p) => {
    expect(() => quantile(values, p)).toThrow(RangeError);
  });
});

describe('weightedQuantile', () => {
  it.each([
    [0.01, 1],
    [0.25, 3],
    [0.5, 5.5],
    [0.9, 9.5],
    [0.99, 10],
  ])('with equal weights is definition 5 of Hyndman & Fan 1996: p = %d gives %d', (p, expected) => {
    expect(weightedQuantile(ONE_TO_TEN, EQUAL, p)).toBeCloseTo(expected, 12);
  });

  it('does not mind the scale of weights, order, or values without weight', () => {
    fc.assert(
      fc.property(sample, probability, fc.double({ min: 0.01, max: 100, noNaN: true }), (values, p, k) => {
        const weights = values.map((_, i) => 1 + (i % 3));
        const plain = weightedQuantile(values, weights, p);
        const scaled = weightedQuantile(
          values.toReversed(),
          weights.toReversed().map((w) => w * k),
          p,
        );
        expect(scaled).toBeCloseTo(plain, 3);
        expect(weightedQuantile([...values, 5e6], [...weights, 0], p)).toBeCloseTo(plain, 6);
      }),
    );
  });

  it('recovers the quantiles of a normal from a weighted uniform grid', () => {
    const grid = Array.from({ length: 2001 }, (_, i) => -6 + (12 * i) / 2000);
    const weights = grid.map((z) => Math.exp((-z * z) / 2));
    expect(weightedQuantile(grid, weights, 0.05)).toBeCloseTo(-1.644854, 4);
    expect(weightedQuantile(grid, weights, 0.975)).toBeCloseTo(1.959964, 4);
  });

  it.each([
    ['no weight above zero', [1, 2], [0, 0]],
    ['a negative weight', [1, 2], [1, -1]],
    ['a weight that is no number', [1, 2], [1, Number.NaN]],
    ['a value that is no number', [1, Number.NaN], [1, 1]],
    ['unequal lengths', [1, 2], [1]],
  ])('refuses %s', (_what, values, weights) => {
    expect(() => weightedQuantile(values, weights, 0.5)).toThrow(RangeError);
  });
});
