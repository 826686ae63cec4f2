import { describe, expect, it } from 'vitest';
import { erf } from '../../src/numerics/erf.ts';
import { normalCdf } from '../../src/numerics/normal.ts';

describe('normalCdf', () => {
  it('is within 1e-7 of the series for the error function', () => {
    for (let z = -6; z <= 6; z += 0.25) {
      expect(Math.abs(normalCdf(z) - 0.5 * (1 + erf(z / Math.SQRT2)))).toBeLessThan(1e-7);
    }
  });
});
