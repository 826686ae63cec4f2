import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { findRoot } from '../../src/numerics/root.ts';

const finite = (min: number, max: number): fc.Arbitrary<number> => fc.double({ min, max, noNaN: true });

describe('findRoot', () => {
  it('finds the root of any monotone cubic within its tolerance', () => {
    fc.assert(
      fc.property(finite(-50, 50), finite(1e-3, 1e3), finite(0, 10), (root, slope, cubic) => {
        const f = (x: number): number => slope * (x - root) + cubic * (x - root) ** 3;
        const found = findRoot(f, -60, 70, { tolerance: 1e-9 });
        expect(Math.abs((found ?? Number.NaN) - root)).toBeLessThan(1e-8);
      }),
    );
  });

  it('needs few evaluations on a hard exponential', () => {
    let evaluations = 0;
    const found = findRoot(
      (x) => {
        evaluations += 1;
        return Math.exp(x) - 1e5;
      },
      -50,
      50,
    );
    expect(found).toBeCloseTo(Math.log(1e5), 9);
    // Bisection alone would take log2(100/1e-9) = 37.
    expect(evaluations).toBeLessThan(20);
  });

  it('takes an end that is the root, and either order of ends', () => {
    expect(findRoot((x) => x - 2, 2, 5)).toBe(2);
    expect(findRoot((x) => x - 5, 2, 5)).toBe(5);
    expect(findRoot((x) => x - 3, 5, 2)).toBeCloseTo(3, 9);
  });

  it.each([
    ['the ends do not bracket', (x: number) => x * x + 1],
    ['the function is not a number', () => Number.NaN],
    ['it turns into no number inside', (x: number) => (Math.abs(x) > 0.9 ? x : Number.NaN)],
  ])('gives null when %s', (_when, f) => {
    expect(findRoot(f, -1, 1)).toBeNull();
  });

  it('gives null when the iterations run out', () => {
    expect(findRoot((x) => Math.exp(x) - 1e5, -50, 50, { maxIterations: 2 })).toBeNull();
  });
});
