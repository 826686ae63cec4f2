import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { iceAtNormalPressure, iceProperties } from '../../src/physics/ice.ts';
import {
  WATER_CP_J_PER_KG_K,
  waterDensityKgPerM3,
  waterEnthalpyJPerKg,
  waterHeatCapacityJPerKgK,
} from '../../src/physics/water.ts';

const liquid = fc.double({ min: -19, max: 109, noNaN: true });
const frozen = fc.double({ min: -100, max: -0.1, noNaN: true });
const STEP_K = 0.01;
const iceEnthalpy = (c: number): number => iceAtNormalPressure(c).enthalpyJPerKg;

describe('water', () => {
  it('has a heat capacity that is the slope of its enthalpy', () => {
    fc.assert(
      fc.property(liquid, (c) => {
        const rise = waterEnthalpyJPerKg(c + STEP_K) - waterEnthalpyJPerKg(c - STEP_K);
        expect(rise / (2 * STEP_K) / waterHeatCapacityJPerKgK(c)).toBeCloseTo(1, 6);
      }),
    );
  });

  it('is densest at 3.98 °C', () => {
    const at = Array.from({ length: 1001 }, (_, i) => i / 100);
    const densest = at.reduce((best, c) => (waterDensityKgPerM3(c) > waterDensityKgPerM3(best) ? c : best));
    expect(densest).toBeCloseTo(3.98, 1);
  });

  it('has the stated mean heat capacity between 0 and 15 °C', () => {
    const mean = (waterEnthalpyJPerKg(15) - waterEnthalpyJPerKg(0)) / 15;
    expect(Math.abs(mean - WATER_CP_J_PER_KG_K)).toBeLessThan(1.5);
  });

  it.each([Number.NaN, -20.1, 111, Infinity])('is refused at %d °C', (c) => {
    for (const property of [waterEnthalpyJPerKg, waterDensityKgPerM3, waterHeatCapacityJPerKgK]) {
      expect(() => property(c)).toThrow('Expected liquid water');
    }
  });
});

describe('ice', () => {
  it('has a heat capacity that is the slope of its enthalpy', () => {
    fc.assert(
      fc.property(frozen, (c) => {
        const slope = (iceEnthalpy(c + STEP_K) - iceEnthalpy(c - STEP_K)) / (2 * STEP_K);
        expect(slope / iceAtNormalPressure(c).heatCapacityJPerKgK).toBeCloseTo(1, 6);
      }),
    );
  });

  it('is lighter than water beside it', () => {
    expect(iceAtNormalPressure(0).densityKgPerM3).toBeLessThan(waterDensityKgPerM3(0));
  });

  it.each([
    [274, 101_325],
    [Number.NaN, 101_325],
    [0, 101_325],
    [200, Number.NaN],
    [200, 3e8],
  ])('is refused at %d K and %d Pa', (kelvin, pa) => {
    expect(() => iceProperties(kelvin, pa)).toThrow('Expected ice');
  });
});
