import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  effectiveness,
  lmtdK,
  phaseChangeEffectiveness,
  type Arrangement,
} from '../../src/physics/heat-exchanger.ts';

const ARRANGEMENTS: readonly Arrangement[] = [
  'counterflow',
  'parallel',
  'crossflow-unmixed',
  'crossflow-cmax-mixed',
  'crossflow-cmin-mixed',
  'shell-and-tube',
];
const ntu = fc.double({ min: 0, max: 12, noNaN: true });
const ratio = fc.double({ min: 0, max: 1, noNaN: true });

describe.each(ARRANGEMENTS)('effectiveness, %s', (arrangement) => {
  it('lies between nothing and the counterflow', () => {
    fc.assert(
      fc.property(ntu, ratio, (n, cr) => {
        const found = effectiveness(n, cr, arrangement);
        expect(found).toBeGreaterThanOrEqual(0);
        // The unmixed crossflow formula is a fit and may pass the true bound by some 1e-3.
        expect(found).toBeLessThanOrEqual(effectiveness(n, cr, 'counterflow') + 2e-3);
      }),
    );
  });

  it('becomes that of a phase change as the ratio goes to nothing', () => {
    fc.assert(
      fc.property(ntu, (n) => {
        expect(effectiveness(n, 1e-7, arrangement)).toBeCloseTo(phaseChangeEffectiveness(n), 5);
        expect(effectiveness(n, 0, arrangement)).toBe(phaseChangeEffectiveness(n));
      }),
    );
  });

  it.each([
    [Number.NaN, 0.5],
    [-1, 0.5],
    [1, 1.1],
    [1, Number.NaN],
  ])('refuses NTU %d with ratio %d', (n, cr) => {
    expect(() => effectiveness(n, cr, arrangement)).toThrow('Expected NTU');
  });
});

const near = (gap: number): number | null =>
  lmtdK({ hotInC: 30, hotOutC: 20 + gap, coldInC: 10, coldOutC: 20 });

describe('mean temperature difference', () => {
  it('agrees with the effectiveness of a counterflow exchanger', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.05, max: 6, noNaN: true }),
        fc.double({ min: 0.05, max: 1, noNaN: true }),
        (n, cr) => {
          const heat = effectiveness(n, cr, 'counterflow') * 40; // Cmin 1 W/K, 40 K between the inlets
          const mean = lmtdK({ hotInC: 50, hotOutC: 50 - heat, coldInC: 10, coldOutC: 10 + cr * heat });
          expect((n * (mean ?? 0)) / heat).toBeCloseTo(1, 6);
        },
      ),
    );
  });

  it('is the common difference when both ends are alike, without a jump beside it', () => {
    expect(lmtdK({ hotInC: 30, hotOutC: 20, coldInC: 10, coldOutC: 20 })).toBe(10);
    expect(near(1.0001e-3)).toBeCloseTo(near(0.9999e-3) ?? 0, 6);
  });

  it.each([
    { hotInC: 30, hotOutC: 8, coldInC: 10, coldOutC: 20 },
    { hotInC: 30, hotOutC: 10, coldInC: 10, coldOutC: 20 },
    { hotInC: Number.NaN, hotOutC: 20, coldInC: 10, coldOutC: 20 },
  ])('is null for $hotInC/$hotOutC against $coldInC/$coldOutC', (ends) => {
    expect(lmtdK(ends)).toBeNull();
  });
});
