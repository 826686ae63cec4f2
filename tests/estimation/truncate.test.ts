import { describe, expect, it } from 'vitest';
import { beliefFrom, sdOf, truncate } from '../../src/estimation/filter.ts';
import { STATES, X } from '../../src/estimation/layout.ts';
import { createRandom } from '../../src/numerics/random.ts';

function belief(mean: number, sd: number) {
  const means = new Float64Array(STATES);
  const sds = new Float64Array(STATES).fill(1);
  means[X.ice] = mean;
  sds[X.ice] = sd;
  return beliefFrom(means, sds);
}

describe('truncate', () => {
  it('has the mean, deviation and share of a sampled normal cut at the limit', () => {
    const random = createRandom(4);
    const kept: number[] = [];
    const drawn = 200_000;
    for (let i = 0; i < drawn; i++) {
      const value = 1.1 + 0.2 * random.normal();
      if (value <= 1) kept.push(value);
    }
    const mean = kept.reduce((sum, value) => sum + value, 0) / kept.length;
    const sd = Math.sqrt(kept.reduce((sum, value) => sum + (value - mean) ** 2, 0) / kept.length);

    const cut = belief(1.1, 0.2);
    const left = truncate(cut, X.ice, 1, 'at-most', 0);
    expect(cut.mean[X.ice]).toBeCloseTo(mean, 2);
    expect(sdOf(cut, X.ice)).toBeCloseTo(sd, 2);
    expect(Math.exp(left)).toBeCloseTo(kept.length / drawn, 2);
  });

  it('is the mirror image for a lower limit', () => {
    const above = belief(1.1, 0.2);
    const below = belief(-1.1, 0.2);
    truncate(above, X.ice, 1, 'at-most', 0.05);
    truncate(below, X.ice, -1, 'at-least', 0.05);
    expect(below.mean[X.ice]).toBeCloseTo(-above.mean[X.ice], 12);
    expect(sdOf(below, X.ice)).toBeCloseTo(sdOf(above, X.ice), 12);
  });

  it('leaves a belief alone that does not lie beyond, and one that was cut before', () => {
    const within = belief(0.5, 0.2);
    expect(truncate(within, X.ice, 1, 'at-most', 0)).toBe(0);
    expect(within.mean[X.ice]).toBe(0.5);
    const cut = belief(1.1, 0.2);
    truncate(cut, X.ice, 1, 'at-most', 0);
    const mean = cut.mean[X.ice];
    expect(truncate(cut, X.ice, 1, 'at-most', 0)).toBe(0);
    expect(cut.mean[X.ice]).toBe(mean);
  });
});
