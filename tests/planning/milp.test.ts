/** The deterministic core against an independent solver on the same problems. */
import { describe, expect, it } from 'vitest';
import { quantile } from '../../src/numerics/quantile.ts';
import { milpGaps } from './milp-gap.ts';

describe('dynamic programme against a mixed-integer programme', () => {
  it('is within 1 % of HiGHS in the mean of 50 random problems, and none falls far', async () => {
    const gaps = await milpGaps(4_711, 50);
    const pct = gaps.map((gap) => gap.gapPct);
    const mean = pct.reduce((sum, gap) => sum + gap, 0) / pct.length;
    expect(gaps).toHaveLength(50);
    expect(mean).toBeLessThanOrEqual(1);
    expect(quantile(pct, 0.9)).toBeLessThanOrEqual(2);
    // The solver is a bound from below: a planner that beats it would be solving another problem.
    expect(Math.min(...pct)).toBeGreaterThan(-0.05);
  }, 40_000);
});
