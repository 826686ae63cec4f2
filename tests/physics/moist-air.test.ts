import * as fc from 'fast-check';
import psychrolib from 'psychrolib';
import { describe, expect, it } from 'vitest';
import {
  airDensityKgPerM3,
  dewPointC,
  dewPointFromRatioC,
  humidityRatio,
  moistVolumeM3PerKg,
  relativeHumidityPct,
  saturationHumidityRatio,
  standardPressurePa,
  wetBulbC,
} from '../../src/physics/moist-air.ts';

const air = fc.double({ min: -30, max: 55, noNaN: true });
const humidity = fc.double({ min: 1, max: 100, noNaN: true });
const pressure = fc.double({ min: 60_000, max: 105_000, noNaN: true });

describe('moist air', () => {
  it('stands in SI', () => {
    expect(psychrolib.GetSatVapPres(0)).toBeCloseTo(611, 0);
  });

  it('comes back to its relative humidity', () => {
    fc.assert(
      fc.property(air, humidity, pressure, (c, rh, pa) => {
        expect(relativeHumidityPct(c, humidityRatio(c, rh, pa), pa)).toBeCloseTo(rh, 6);
      }),
    );
  });

  it('has dew point ≤ wet bulb ≤ dry bulb', () => {
    fc.assert(
      fc.property(air, humidity, pressure, (c, rh, pa) => {
        const dew = dewPointC(c, rh, pa);
        const wet = wetBulbC(c, rh, pa);
        // PsychroLib stops both searches within 0.001 K; over ice the wet bulb of saturated air is its least sure.
        expect(dew).toBeLessThanOrEqual(wet + 2e-3);
        expect(wet).toBeLessThanOrEqual(c + 2e-3);
        expect(dewPointFromRatioC(c, saturationHumidityRatio(dew, pa), pa)).toBeCloseTo(dew, 2);
      }),
    );
  });

  it('has a density of (1 + W) over its volume, less than dry air', () => {
    fc.assert(
      fc.property(air, humidity, pressure, (c, rh, pa) => {
        const ratio = humidityRatio(c, rh, pa);
        const density = airDensityKgPerM3(c, ratio, pa);
        expect(density * moistVolumeM3PerKg(c, ratio, pa)).toBeCloseTo(1 + ratio, 9);
        expect(density).toBeLessThan(airDensityKgPerM3(c, 0, pa));
      }),
    );
  });

  it('thins with height', () => {
    expect(standardPressurePa(1080)).toBeLessThan(standardPressurePa(0));
  });

  it.each([
    ['a temperature that is no number', () => humidityRatio(Number.NaN, 50, 101_325)],
    ['a humidity that is no number', () => humidityRatio(20, Number.NaN, 101_325)],
    ['a humidity above 100 %', () => humidityRatio(20, 101, 101_325)],
    ['a pressure that is no number', () => wetBulbC(20, 50, Number.NaN)],
    ['a pressure of nothing', () => relativeHumidityPct(20, 0.01, 0)],
    ['a negative humidity ratio', () => dewPointFromRatioC(20, -1e-3, 101_325)],
  ])('refuses %s', (_what, call) => {
    expect(call).toThrow();
  });
});
