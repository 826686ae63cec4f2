import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { comfortVapourPressurePa, heatIndexC, pmvPpd, type ComfortState } from '../../src/physics/comfort.ts';
import { saturationPressurePa } from '../../src/physics/moist-air.ts';

const SEATED: ComfortState = {
  airC: 26,
  radiantC: 26,
  airSpeedMPerS: 0.1,
  relativeHumidityPct: 50,
  activityMet: 1.2,
  clothingClo: 0.5,
};
const state = fc.record({
  airC: fc.double({ min: 10, max: 34, noNaN: true }),
  radiantC: fc.double({ min: 10, max: 38, noNaN: true }),
  airSpeedMPerS: fc.double({ min: 0, max: 1, noNaN: true }),
  relativeHumidityPct: fc.double({ min: 0, max: 100, noNaN: true }),
  activityMet: fc.double({ min: 0.8, max: 4, noNaN: true }),
  clothingClo: fc.double({ min: 0, max: 2, noNaN: true }),
});

describe('the predicted mean vote', () => {
  it('settles all over its range and never satisfies more than 95 %', () => {
    fc.assert(
      fc.property(state, (s) => {
        const vote = pmvPpd(s);
        expect(vote?.ppdPct).toBeGreaterThanOrEqual(5);
        expect(vote?.ppdPct).toBeLessThanOrEqual(100);
      }),
    );
  });

  it('rises with air, walls and moisture', () => {
    fc.assert(
      fc.property(state, (s) => {
        const pmv = (change: Partial<ComfortState>): number => pmvPpd({ ...s, ...change })?.pmv ?? Number.NaN;
        // The iteration stops within 0.015 K of clothing temperature, some 0.003 of a vote.
        const least = pmv({}) - 0.01;
        expect(pmv({ airC: s.airC + 1 })).toBeGreaterThan(least);
        expect(pmv({ radiantC: s.radiantC + 1 })).toBeGreaterThan(least);
        expect(pmv({ relativeHumidityPct: Math.min(100, s.relativeHumidityPct + 10) })).toBeGreaterThan(
          least,
        );
      }),
    );
  });

  it.each(Object.keys(SEATED))('is null when %s is no number', (key) => {
    expect(pmvPpd({ ...SEATED, [key]: Number.NaN })).toBeNull();
  });

  it('takes a vapour pressure within 0.2 % of ASHRAE’s at room temperatures', () => {
    for (const c of [15, 20, 26, 30]) {
      expect(comfortVapourPressurePa(c, 100) / saturationPressurePa(c)).toBeCloseTo(1, 2);
      expect(Math.abs(comfortVapourPressurePa(c, 100) / saturationPressurePa(c) - 1)).toBeLessThan(2e-3);
    }
  });
});

describe('the heat index', () => {
  it('rises with humidity in the heat', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 28, max: 43, noNaN: true }),
        fc.double({ min: 30, max: 80, noNaN: true }),
        (c, rh) => {
          expect(heatIndexC(c, rh + 5)).toBeGreaterThan(heatIndexC(c, rh) ?? Number.NaN);
        },
      ),
    );
  });

  it.each([
    [Number.NaN, 50],
    [30, Number.NaN],
    [30, 101],
    [30, -1],
  ])('is null for %d °C and %d %', (c, rh) => {
    expect(heatIndexC(c, rh)).toBeNull();
  });
});
