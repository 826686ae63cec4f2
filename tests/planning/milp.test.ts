/** The deterministic core against an independent solver on the same problems. */
import { describe, expect, it } from 'vitest';
import { milpGaps } from './milp-gap.ts';

describe('dynamic programme against a mixed-integer programme', () => {
  it('is within 1 % of HiGHS on each of 50 random problems', async () => {
    const gaps = await milpGaps(4_711, 50);
    const pct = gaps.map((gap) => gap.gapPct);
    expect(gaps).toHaveLength(50);
    expect(Math.max(...pct)).toBeLessThanOrEqual(1);
    // The solver is a bound from below: a planner that beats it would be solving another problem.
    expect(Math.min(...pct)).toBeGreaterThan(-0.05);
  }, 120_000);
});
