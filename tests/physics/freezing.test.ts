import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { rk4 } from '../../src/numerics/ode.ts';
import {
  freeSurfaceFraction,
  onePhaseLambda,
  radiusOnTubeM,
  shellConductanceWPerK,
  stefanThicknessM,
  timeOnTubeS,
  twoPhaseLambda,
} from '../../src/physics/freezing.ts';
import { FUSION_J_PER_KG, ICE_DENSITY } from '../../src/physics/water.ts';

const tube = fc.double({ min: 3e-3, max: 2e-2, noNaN: true });
const subcooling = fc.double({ min: 0.5, max: 25, noNaN: true });

describe('ice on a tube', () => {
  it('comes back from radius to time to radius', () => {
    fc.assert(
      fc.property(tube, subcooling, fc.double({ min: 1.001, max: 6, noNaN: true }), (a, k, times) => {
        const radius = radiusOnTubeM(a, timeOnTubeS(a, a * times, k), k);
        expect((radius ?? 0) / (a * times)).toBeCloseTo(1, 6);
      }),
    );
  });

  it('follows the heat that its own shell conducts, integrated step by step', () => {
    const [a, k, until, steps] = [0.008, 5, 3600, 2000];
    const growth = ([r]: readonly number[]): number[] => [
      (shellConductanceWPerK(a, r) * k) / (2 * Math.PI * r * ICE_DENSITY * FUSION_J_PER_KG),
    ];
    const start = 0.01;
    const head = timeOnTubeS(a, start, k);
    let y: number[] = [start];
    for (let i = 0; i < steps; i++) y = rk4(growth, y, 0, (until - head) / steps);
    expect(y[0]).toBeCloseTo(radiusOnTubeM(a, until, k) ?? 0, 7);
  });

  it('is thinner than on a flat face and tends to it on a wide tube', () => {
    const flat = stefanThicknessM(5, 3600);
    const thin = (radiusOnTubeM(0.008, 3600, 5) ?? 0) - 0.008;
    const wide = (radiusOnTubeM(50, 3600, 5) ?? 0) - 50;
    expect(thin).toBeLessThan(flat);
    expect(wide / flat).toBeCloseTo(1, 3);
  });

  it('has no radius for input without meaning', () => {
    expect(radiusOnTubeM(0.008, 0, 5)).toBe(0.008);
    expect([radiusOnTubeM(0.008, Number.NaN, 5), radiusOnTubeM(0.008, -1, 5)]).toEqual([null, null]);
  });
});

describe('a square lattice of ice cylinders', () => {
  it('has the free surface that a walk around one of them finds', () => {
    const pitch = 0.05;
    for (const radius of [0.02, 0.026, 0.03, 0.034, 0.036]) {
      const angles = Array.from({ length: 20_000 }, (_, i) => (2 * Math.PI * (i + 0.5)) / 20_000);
      const free = angles.filter((t) => {
        const [x, y] = [radius * Math.cos(t), radius * Math.sin(t)];
        const centres = [
          [pitch, 0],
          [-pitch, 0],
          [0, pitch],
          [0, -pitch],
        ] as const;
        return centres.every(([cx, cy]) => Math.hypot(x - cx, y - cy) >= radius);
      });
      expect(freeSurfaceFraction(radius, pitch)).toBeCloseTo(free.length / angles.length, 3);
    }
  });

  it('is free while apart and gone when the gaps are filled', () => {
    expect(freeSurfaceFraction(0.02, 0.05)).toBe(1);
    expect(freeSurfaceFraction(0.05 / Math.SQRT2 + 1e-9, 0.05)).toBe(0);
  });
});

describe('growth constants', () => {
  const ice = { conductivityWPerMK: 2.22, heatCapacityJPerKgK: 2050, densityKgPerM3: 917 };
  const water = { conductivityWPerMK: 0.57, heatCapacityJPerKgK: 4205, densityKgPerM3: 1000 };
  const two = (subcoolingK: number, superheatK: number): number | null =>
    twoPhaseLambda({ ice, water, fusionJPerKg: 333.43e3, subcoolingK, superheatK });

  it('meet when the water is at the ice point', () => {
    fc.assert(
      fc.property(subcooling, (k) => {
        expect(two(k, 0)).toBeCloseTo(onePhaseLambda((2050 * k) / 333.43e3) ?? 0, 8);
      }),
    );
  });

  it('fall as the water is warmer', () => {
    fc.assert(
      fc.property(subcooling, fc.double({ min: 0, max: 20, noNaN: true }), (k, warm) => {
        expect(two(k, warm + 1)).toBeLessThan(two(k, warm) ?? 0);
      }),
    );
  });

  it('do not exist without cold', () => {
    expect([onePhaseLambda(0), onePhaseLambda(-1), onePhaseLambda(Number.NaN), two(-1, 4)]).toEqual([
      null,
      null,
      null,
      null,
    ]);
  });
});
