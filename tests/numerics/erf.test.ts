import { describe, expect, it } from 'vitest';
import { erf } from '../../src/numerics/erf.ts';

describe('erf', () => {
  // Abramowitz & Stegun 1964, table 7.1 (from memory), ten digits.
  it.each([
    [0, 0],
    [0.1, 0.112462916],
    [0.5, 0.5204998778],
    [1, 0.8427007929],
    [1.5, 0.9661051465],
    [2, 0.995322265],
    [3, 0.9999779095],
  ])('of %d is %d', (x, expected) => {
    expect(Math.abs(erf(x) - expected)).toBeLessThan(6e-11);
    expect(erf(-x)).toBeCloseTo(-expected, 10);
  });

  it('saturates', () => {
    expect(erf(5.9)).toBeCloseTo(1, 14);
    expect([erf(7), erf(-7), erf(Infinity)]).toEqual([1, -1, 1]);
    expect(erf(Number.NaN)).toBeNaN();
  });
});
