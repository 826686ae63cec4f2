import { describe, expect, it } from 'vitest';
import { effectiveness } from '../../src/physics/heat-exchanger.ts';
import { humidityRatio, saturationHumidityRatio } from '../../src/physics/moist-air.ts';
import { FanCoil } from '../../src/simulator/fan-coil.ts';
import { SaturationTable } from '../../src/simulator/saturation.ts';

const SEA_LEVEL_PA = 101_325;
const saturation = new SaturationTable(SEA_LEVEL_PA);
const AIR_KG_PER_S = 0.22;
const WATER_KG_PER_S = 0.2;
const CP = 1006;
const VAPOUR = 2.501e6;

function coilAt(airC: number, rhPct: number, waterC: number, dryWPerK = 180): FanCoil {
  const coil = new FanCoil(saturation);
  // The slope of saturation is carried from call to call: a few calls settle it, as steps do in the plant.
  for (let i = 0; i < 5; i++) {
    coil.run(airC, humidityRatio(airC, rhPct, SEA_LEVEL_PA), waterC, AIR_KG_PER_S, WATER_KG_PER_S, dryWPerK);
  }
  return coil;
}

describe('the table of saturated air', () => {
  it('is within 0.02 % of the formula and is its own inverse', () => {
    for (let c = -10.05; c < 45; c += 0.37) {
      expect(saturation.ratio(c) / saturationHumidityRatio(c, SEA_LEVEL_PA)).toBeCloseTo(1, 3);
      expect(saturation.dewPointC(saturation.ratio(c))).toBeCloseTo(c, 6);
      expect(saturation.humidityPct(30, saturation.ratioAt(30, 47))).toBeCloseTo(47, 9);
    }
  });
});

describe('a dry coil', () => {
  it('is the effectiveness–NTU exchanger', () => {
    const coil = coilAt(28, 20, 10);
    const air = AIR_KG_PER_S * CP;
    const epsilon = effectiveness(180 / air, air / (WATER_KG_PER_S * 4200), 'counterflow');
    expect(coil.latentW).toBe(0);
    expect(coil.sensibleW).toBeCloseTo(epsilon * air * 18, 6);
  });

  it('gives nothing at equal temperatures, and turns round when the water is warmer', () => {
    expect(coilAt(20, 40, 20).sensibleW).toBeCloseTo(0, 9);
    expect(coilAt(20, 40, 30).sensibleW).toBeLessThan(0);
    expect(coilAt(20, 90, 30).latentW).toBe(0);
  });
});

describe('a wet coil', () => {
  it('takes more heat than the same coil dry, part of it as condensate', () => {
    const dry = coilAt(28, 20, 5);
    const wet = coilAt(28, 70, 5);
    expect(wet.sensibleW + wet.latentW).toBeGreaterThan(1.1 * dry.sensibleW);
    expect(wet.latentW).toBeCloseTo(wet.condensateKgPerS * VAPOUR, 9);
    expect(wet.latentW / (wet.sensibleW + wet.latentW)).toBeGreaterThan(0.2);
    expect(wet.latentW / (wet.sensibleW + wet.latentW)).toBeLessThan(0.7);
  });

  it('takes more the damper the air, without a leap where it turns wet', () => {
    let last = coilAt(27, 20, 7);
    for (let rh = 21; rh <= 95; rh++) {
      const next = coilAt(27, rh, 7);
      const rise = next.sensibleW + next.latentW - last.sensibleW - last.latentW;
      expect(rise).toBeGreaterThanOrEqual(-1e-6);
      expect(rise).toBeLessThan(0.05 * (last.sensibleW + last.latentW));
      last = next;
    }
  });

  it('leaves air that is neither drier than saturated at the water nor wetter than saturated', () => {
    for (const rh of [50, 70, 90]) {
      const ratio = humidityRatio(28, rh, SEA_LEVEL_PA);
      const coil = coilAt(28, rh, 6);
      const outC = 28 - coil.sensibleW / (AIR_KG_PER_S * CP);
      const outRatio = ratio - coil.condensateKgPerS / AIR_KG_PER_S;
      expect(outC).toBeGreaterThan(6);
      expect(outRatio).toBeGreaterThan(saturation.ratio(6));
      // The straight line to the apparatus dew point may cross saturation by a little at high humidity.
      expect(outRatio).toBeLessThan(1.03 * saturation.ratio(outC));
    }
  });

  it('comes to saturated air at the water temperature in the limit of a very large coil', () => {
    const ratio = humidityRatio(28, 70, SEA_LEVEL_PA);
    const coil = new FanCoil(saturation);
    for (let i = 0; i < 5; i++) coil.run(28, ratio, 7, 0.02, 5, 20_000);
    expect(28 - coil.sensibleW / (0.02 * CP)).toBeCloseTo(7, 1);
    expect(ratio - coil.condensateKgPerS / 0.02).toBeCloseTo(saturation.ratio(7), 4);
  });
});
