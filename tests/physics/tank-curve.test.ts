import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  curveHeatW,
  lmtdStar,
  MEASURED_TANK,
  simulatedTank,
  solveTank,
  tankUaWPerK,
  type TankCurve,
} from '../../src/physics/tank-curve.ts';

const TANKS: readonly (readonly [string, TankCurve])[] = [
  ['the measured tank', MEASURED_TANK],
  ['the simulated tank', simulatedTank(5e8)],
];
const charge = fc.double({ min: 0, max: 1, noNaN: true });
const entering = fc.double({ min: -12, max: 18, noNaN: true });
const flow = fc.double({ min: 50, max: 2e4, noNaN: true });

describe.each(TANKS)('%s', (_name, tank) => {
  it('conserves energy and leaves between entering and freezing', () => {
    fc.assert(
      fc.property(charge, entering, flow, (soc, enteringC, flowWPerK) => {
        const { heatW, leavingC, direction } = solveTank(tank, soc, enteringC, flowWPerK);
        const [low, high] = [Math.min(enteringC, 0), Math.max(enteringC, 0)];
        expect(heatW).toBeGreaterThanOrEqual(0);
        expect(heatW).toBeCloseTo(flowWPerK * Math.abs(enteringC - leavingC), 6);
        expect(leavingC).toBeGreaterThanOrEqual(low);
        expect(leavingC).toBeLessThanOrEqual(high);
        const sign = { charging: -1, discharging: 1, none: 0 }[direction ?? 'none'];
        expect(sign).toBe(Math.abs(enteringC) > 0.01 ? Math.sign(enteringC) : 0);
      }),
    );
  });

  it('meets its own curve unless the coolant reaches the freezing point', () => {
    fc.assert(
      fc.property(charge, entering, flow, (soc, enteringC, flowWPerK) => {
        const { heatW, leavingC, direction } = solveTank(tank, soc, enteringC, flowWPerK);
        if (direction === null || leavingC === 0) return;
        const asked = curveHeatW(tank, direction, soc, lmtdStar(enteringC, leavingC, 0));
        expect(Math.abs(heatW - asked)).toBeLessThan(1e-6 * tank.capacityJ);
      }),
    );
  });

  it.each([
    ['no flow', 5, 0],
    ['a flow that is no number', 5, Number.NaN],
    ['a temperature that is no number', Number.NaN, 1000],
    ['coolant at the freezing point', 0.005, 1000],
  ])('stands still with %s', (_what, enteringC, flowWPerK) => {
    expect(solveTank(tank, 0.5, enteringC, flowWPerK)).toEqual({
      direction: null,
      heatW: 0,
      leavingC: enteringC,
    });
  });
});

describe('the mean difference', () => {
  it('is bounded beside the freezing point and continuous where both ends are alike', () => {
    expect(lmtdStar(0, 0, 0)).toBe(0);
    // Both differences are held to 0.02 and 0.01 K: (1 - 0)/ln(1/0.01) / 10 K.
    expect(lmtdStar(1, 0, 0)).toBeCloseTo(1 / Math.log(100) / 10, 12);
    expect(lmtdStar(Number.NaN, 0, 0)).toBeNaN();
    expect(lmtdStar(5, 5, 0)).toBe(0.5);
    expect(lmtdStar(5, 4.9999, 0)).toBeCloseTo(0.5, 4);
  });
});

describe('the UA polynomials', () => {
  it('fall as the ice thickens or melts away, in proportion to the tank', () => {
    for (const form of ['internal', 'external'] as const) {
      const along = [0, 0.25, 0.5, 0.75, 1].map((y) => tankUaWPerK(form, y, 1e9));
      expect(along).toEqual(along.toSorted((a, b) => b - a));
      expect(tankUaWPerK(form, 0.3, 2e9)).toBeCloseTo(2 * tankUaWPerK(form, 0.3, 1e9), 6);
    }
  });
});
