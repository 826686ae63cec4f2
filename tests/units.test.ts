import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { DIMENSIONS, fromInside, parseQuantity, toInside, unitNames, type Dimension } from '../src/units.ts';

/** NIST Special Publication 811 (2008), appendix B.8 and B.9, unless another source stands beside. */
const PUBLISHED: [
  value: number,
  unit: string,
  dimension: Dimension,
  inside: number,
  tolerance: number,
  source: string,
][] = [
  [32, 'degF', 'temperature', 0, 1e-9, 'ice point, exact by definition'],
  [212, '°F', 'temperature', 100, 1e-9, 'exact by definition'],
  [273.15, 'K', 'temperature', 0, 1e-9, 'exact by definition'],
  [1, 'gal', 'volume', 3.785412, 1e-6, 'SP 811 B.8 gallon (U.S.)'],
  [1, 'lb', 'mass', 0.4535924, 1e-7, 'SP 811 B.8 pound (avoirdupois)'],
  [1, 'ton', 'power', 3516.853, 1e-3, 'SP 811 B.8 ton of refrigeration (12 000 BtuIT/h)'],
  [1, 'BTU/h', 'power', 0.2930711, 1e-7, 'SP 811 B.8 British thermal unit IT per hour'],
  [1, 'BTU', 'energy', 1055.056 / 3.6e6, 1e-9, 'SP 811 B.8 British thermal unit IT'],
  [1, 'ft3/min', 'airFlow', 1.699011, 1e-6, 'SP 811 B.8 cubic foot per minute, 4.719474e-4 m3/s'],
  [1, 'gal/min', 'waterFlow', 6.30902e-5 * 60_000, 1e-5, 'SP 811 B.8 gallon per minute'],
  [1, 'ft', 'length', 0.3048, 1e-12, 'exact by definition'],
  [1, 'ft2', 'area', 0.09290304, 1e-12, 'exact by definition'],
  [0.5, '/', 'fraction', 50, 1e-12, 'RFC 8428: ratio, not per cent'],
];

describe('units', () => {
  it.each(PUBLISHED)('%d %s of %s', (value, unit, dimension, inside, tolerance) => {
    expect(Math.abs((toInside(value, unit, dimension) ?? Number.NaN) - inside)).toBeLessThanOrEqual(
      tolerance,
    );
  });

  it('go there and back', () => {
    for (const dimension of Object.keys(DIMENSIONS) as Dimension[]) {
      for (const unit of unitNames(dimension)) {
        fc.assert(
          fc.property(fc.double({ min: -1e4, max: 1e4, noNaN: true }), (value) => {
            const inside = toInside(value, unit, dimension);
            const back = inside === null ? null : fromInside(inside, unit, dimension);
            expect(back).not.toBeNull();
            expect(Math.abs((back as number) - value)).toBeLessThan(1e-6);
          }),
          { numRuns: 20 },
        );
      }
    }
  });

  it('of another dimension are refused, names inherited from objects too', () => {
    expect(toInside(1, 'kg', 'volume')).toBeNull();
    expect(toInside(1, 'constructor', 'volume')).toBeNull();
    expect(fromInside(1, '__proto__', 'mass')).toBeNull();
  });

  it.each(['240', 'L', '', '1e400 L', 'NaN L', '2,5 L', 240, null, undefined, {}])(
    '%s is no volume',
    (text) => {
      const parsed = parseQuantity(text, 'volume');
      expect(parsed.ok).toBe(false);
    },
  );

  it.each([
    ['240 L', 240],
    ['240L', 240],
    ['  .5 m3 ', 500],
    ['-1e-1 m3', -100],
  ])('%s is a volume', (text, inside) => {
    expect(parseQuantity(text, 'volume')).toEqual({ ok: true, value: inside });
  });
});
