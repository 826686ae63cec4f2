import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  carnotCop,
  cycle,
  evaluateMap,
  fromBicubic,
  LOW_TEMPERATURE_R22,
  operateCompressor,
  type MapCoefficients,
} from '../../src/physics/refrigeration.ts';

const MAP = LOW_TEMPERATURE_R22;
const suction = fc.double({ min: MAP.suctionRangeC[0], max: MAP.suctionRangeC[1], noNaN: true });
const discharge = fc.double({ min: MAP.dischargeRangeC[0], max: MAP.dischargeRangeC[1], noNaN: true });

describe('the cycle', () => {
  it('rejects what it takes up and what it uses', () => {
    const states = { suctionJPerKg: 241e3, isentropicDischargeJPerKg: 272e3, liquidJPerKg: 99e3 };
    const found = cycle(states, 0.05, 0.7);
    expect(found.rejectedW).toBeCloseTo(found.coolingW + found.compressorW, 9);
    expect(found.cop).toBeCloseTo(0.7 * cycle(states, 0.05).cop, 9);
  });

  it('has no Carnot limit without a lift', () => {
    expect([carnotCop(20, 20), carnotCop(30, 20), carnotCop(Number.NaN, 20)]).toEqual([null, null, null]);
  });
});

describe('a compressor map', () => {
  it('keeps every term when a bicubic is reordered', () => {
    const c: MapCoefficients = [1, 2, 3, 4, 5, 6, 7, 8, 9, 10];
    const [x, y] = [1.7, -0.6];
    const bicubic = 1 + 2 * x + 3 * x * x + 4 * y + 5 * y * y + 6 * x * y + 7 * x ** 3 + 8 * y ** 3;
    expect(evaluateMap(fromBicubic(c), x, y)).toBeCloseTo(bicubic + 9 * x * x * y + 10 * x * y * y, 12);
  });

  it('stays below Carnot and gives less cold the hotter it rejects', () => {
    fc.assert(
      fc.property(suction, discharge, (s, d) => {
        const found = operateCompressor(MAP, s, d);
        expect(found?.cop).toBeGreaterThan(0);
        expect(found?.cop).toBeLessThan(carnotCop(s, d) ?? 0);
        const hotter = operateCompressor(MAP, s, Math.min(d + 2, MAP.dischargeRangeC[1]));
        expect(hotter?.coolingW).toBeLessThan((found?.coolingW ?? 0) + 1e-6);
      }),
    );
  });

  it.each([
    [-10, 35],
    [-41, 35],
    [-20, 60],
    [Number.NaN, 35],
    [-20, Number.NaN],
  ])('says nothing outside its range: %d, %d °C', (s, d) => {
    expect(operateCompressor(MAP, s, d)).toBeNull();
  });
});
