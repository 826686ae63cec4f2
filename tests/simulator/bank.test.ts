import { describe, expect, it } from 'vitest';
import type { BankForm } from '../../src/config.ts';
import {
  FUSION_J_PER_KG,
  ICE_CONDUCTIVITY,
  ICE_DENSITY,
  WATER_CP_J_PER_KG_K,
} from '../../src/physics/water.ts';
import { IceBank, type BankStep } from '../../src/simulator/bank.ts';
import { LAYERS } from '../../src/simulator/bank-shape.ts';
import { juniperAs } from './site.ts';

const DT_S = 10;
const AT_REST: BankStep = {
  coilOn: false,
  coolantC: 0,
  flowKgPerS: 0,
  enteringC: 0,
  surroundC: 0,
  airRatio: 0.004,
  surfaceRatio: 0.004,
};

function bankOf(form: BankForm, start: { iceKg: number; waterC: number }, supercoolingK = 2): IceBank {
  return new IceBank(juniperAs(form), start, () => supercoolingK);
}

function run(bank: IceBank, hours: number, by: Partial<BankStep>, watch?: (hour: number) => void): void {
  const steps = Math.round((hours * 3600) / DT_S);
  for (let i = 1; i <= steps; i++) {
    bank.step(DT_S, { ...AT_REST, ...by });
    watch?.((i * DT_S) / 3600);
  }
}

const layersC = (bank: IceBank): number[] =>
  Array.from({ length: LAYERS }, (_, i) => bank.layers.temperatureC(i));

describe('a bank at rest', () => {
  it('warms all-liquid water by the exponential of its heat leak', () => {
    const bank = bankOf('ice-on-coil-external', { iceKg: 0, waterC: 8 });
    run(bank, 48, { surroundC: 25 });
    const rate = bank.leakWPerK / (240 * WATER_CP_J_PER_KG_K);
    const mixedC = 25 - 17 * Math.exp(-rate * 48 * 3600);
    // The lid's layer is warmer than the mean and takes in less: the mean lags a mixed tank by at most 2 % of its rise.
    expect(bank.layers.meanC()).toBeLessThanOrEqual(mixedC + 1e-6);
    expect(bank.layers.meanC()).toBeGreaterThan(mixedC - 0.02 * (mixedC - 8));
  });

  it('keeps the bottom near 4 °C under floating ice', () => {
    const bank = bankOf('open-tub', { iceKg: 80, waterC: 0.5 });
    run(bank, 30, { surroundC: 25 });
    expect(bank.iceKg()).toBeGreaterThan(20);
    const [topC] = layersC(bank);
    expect(topC).toBeLessThan(1.5);
    // Densest at 4 °C (IAPWS-95: 3.98 °C): the ice stands in the upper layers alone, what it cools stays above.
    expect(bank.layers.temperatureC(LAYERS - 1)).toBeGreaterThan(3);
    expect(bank.layers.temperatureC(LAYERS - 1)).toBeLessThan(5);
  });

  it('keeps the bottom near 0 °C where ice is held on the coil at every height', () => {
    const bank = bankOf('ice-on-coil-external', { iceKg: 80, waterC: 0.5 });
    run(bank, 30, { surroundC: 25 });
    expect(bank.iceKg()).toBeGreaterThan(20);
    expect(bank.layers.temperatureC(LAYERS - 1)).toBeLessThan(1.5);
  });

  it('puts warm water above cold above 4 °C and below it cold above warm', () => {
    const warm = bankOf('ice-on-coil-external', { iceKg: 0, waterC: 12 });
    run(warm, 24, { surroundC: 30 });
    expect(warm.layers.temperatureC(0)).toBeGreaterThan(warm.layers.temperatureC(LAYERS - 1) - 0.05);
    const cold = bankOf('ice-on-coil-external', { iceKg: 0, waterC: 0.2 });
    run(cold, 10, { surroundC: 12 });
    expect(cold.layers.meanC()).toBeLessThan(3.5);
    expect(cold.layers.temperatureC(LAYERS - 1)).toBeGreaterThan(cold.layers.temperatureC(1));
  });
});

describe('first ice', () => {
  it.each(['ice-on-coil-external', 'ice-on-coil-internal', 'open-tub'] as const)(
    'comes only below 0 °C in a fresh charge of %s, then jumps back',
    (form) => {
      const bank = bankOf(form, { iceKg: 0, waterC: 3 }, 2.5);
      let lowestC = 9;
      let jumpC: number | null = null;
      let iceAtJumpKg = 0;
      run(bank, 12, { coilOn: true, coolantC: -9 }, () => {
        lowestC = Math.min(lowestC, ...layersC(bank));
        if (jumpC === null && bank.iceKg() > 0) {
          jumpC = Math.min(...layersC(bank));
          iceAtJumpKg = bank.iceKg();
        }
      });
      expect(lowestC).toBeLessThan(-2.4);
      expect(lowestC).toBeGreaterThan(-2.7);
      expect(jumpC).toBeCloseTo(0, 6);
      // Sensible cold turned to latent: 240 kg × 4.2 × 2.5 K / 333.4 kJ/kg = 7.6 kg if all of it was as cold.
      expect(iceAtJumpKg).toBeGreaterThan(5);
      expect(iceAtJumpKg).toBeLessThan(7.7);
    },
  );

  it('does not supercool where ice is left', () => {
    const bank = bankOf('ice-on-coil-external', { iceKg: 2, waterC: 1 }, 4);
    let lowestC = 9;
    run(bank, 6, { coilOn: true, coolantC: -9 }, () => (lowestC = Math.min(lowestC, ...layersC(bank))));
    expect(lowestC).toBeGreaterThan(-0.1);
  });
});

describe('freezing on the coil', () => {
  it('follows the quasi-steady solution for a cylinder with a resistance inside', () => {
    const bank = bankOf('ice-on-coil-external', { iceKg: 0.008, waterC: 0 });
    const { wall, coilWPerK } = bank.shape;
    const at: number[] = [];
    const wanted = [20, 50, 90];
    run(bank, 40, { coilOn: true, coolantC: -10 }, (hour) => {
      if (at.length < wanted.length && bank.iceKg() >= wanted[at.length]) at.push(hour);
    });
    // t = L/ΔT [m/G + ((b + m) ln(1 + m/b) − m)/(4πkl)], b = ρπla²: conduction through a growing cylinder, one layer.
    const b = ICE_DENSITY * Math.PI * wall.lengthM * wall.wallRadiusM ** 2;
    const hours = wanted.map((kg) => {
      const m = kg / LAYERS;
      const ice = ((b + m) * Math.log(1 + m / b) - m) / (4 * Math.PI * ICE_CONDUCTIVITY * wall.lengthM);
      return ((FUSION_J_PER_KG / 10) * (m / coilWPerK + ice)) / 3600;
    });
    // Steps of 10 s against hours: first-order error far below 0.5 %.
    for (const [i, hour] of hours.entries()) expect(at[i] / hour).toBeCloseTo(1, 2);
  });

  it('stops where the water ends', () => {
    const bank = bankOf('ice-on-coil-external', { iceKg: 140, waterC: 0 });
    run(bank, 120, { coilOn: true, coolantC: -15 });
    expect(bank.iceKg()).toBeLessThan(240);
    expect(bank.openPart()).toBeLessThan(1);
  });
});

describe('melting', () => {
  it('brings leaving water nearer to 0 °C the more ice there is', () => {
    const leaving = [120, 60, 15].map((iceKg) => {
      const bank = bankOf('ice-on-coil-external', { iceKg, waterC: 4 });
      run(bank, 0.3, { flowKgPerS: 0.2, enteringC: 10 });
      return bank.leavingC;
    });
    expect(leaving[0]).toBeLessThan(leaving[1]);
    expect(leaving[1]).toBeLessThan(leaving[2]);
  });

  it('passes at half inventory what the written melt conductance says', () => {
    const bank = bankOf('ice-on-coil-external', { iceKg: 75, waterC: 6 });
    // A flow so great that the water has one temperature: heat to ice is conductance × temperature.
    const before = bank.iceKg();
    run(bank, 0.05, { flowKgPerS: 50, enteringC: 6 });
    const meltedW = ((before - bank.iceKg()) * FUSION_J_PER_KG) / 180;
    // 450 W/K × 6 K; the ice thins by 3 % meanwhile and the layers stand a little below 6 °C.
    expect(meltedW).toBeGreaterThan(0.94 * 2700);
    expect(meltedW).toBeLessThan(1.01 * 2700);
  });

  it('leaves an annulus inside in internal melt, which freezes again inside the old ice', () => {
    const bank = bankOf('ice-on-coil-internal', { iceKg: 100, waterC: 0.2 });
    run(bank, 1.5, { flowKgPerS: 0.2, enteringC: 9 });
    expect(bank.shells.waterFirst[0]).toBe(1);
    expect(bank.shells.count[0]).toBe(2);
    const melted = 100 - bank.iceKg();
    expect(melted).toBeGreaterThan(10);
    run(bank, 1, { coilOn: true, coolantC: -8 });
    // Ice at the tube, water, old ice: an estimator that knows one radius is wrong here.
    expect(bank.shells.count[0]).toBe(3);
    expect(bank.shells.waterFirst[0]).toBe(0);
    run(bank, 0.05, { flowKgPerS: 0.2, enteringC: 9 });
    expect(bank.shells.count[0]).toBe(4);
    run(bank, 14, { coilOn: true, coolantC: -8 });
    expect(bank.shells.isPlainIce(0)).toBe(true);
    expect(bank.iceKg()).toBeGreaterThan(100);
  });

  it('thins the ice from outside in external melt', () => {
    const bank = bankOf('ice-on-coil-external', { iceKg: 100, waterC: 0.2 });
    run(bank, 1, { flowKgPerS: 0.2, enteringC: 9 });
    expect(bank.shells.isPlainIce(0)).toBe(true);
    expect(bank.shells.iceKg(0)).toBeLessThan(bank.shells.iceKg(LAYERS - 1));
  });
});

describe('sealed containers', () => {
  it('conduct less the further they have frozen, and the further they have melted', () => {
    const freezing: number[] = [];
    const bank = bankOf('sealed-containers', { iceKg: 0, waterC: 0.1 }, 0.01);
    run(bank, 30, { coilOn: true, coolantC: -10 }, (hour) => {
      if (Math.abs(hour - Math.round(hour)) < 1e-9 && bank.iceKg() < 140) freezing.push(bank.iceKg());
    });
    const gains = freezing.slice(1).map((kg, i) => kg - freezing[i]);
    expect(gains.length).toBeGreaterThan(5);
    expect(gains[gains.length - 1]).toBeLessThan(0.8 * gains[1]);
    const melting: number[] = [];
    const full = bankOf('sealed-containers', { iceKg: 140, waterC: 4 });
    run(full, 6, { flowKgPerS: 5, enteringC: 4 }, (hour) => {
      if (Math.abs(hour * 2 - Math.round(hour * 2)) < 1e-9) melting.push(full.iceKg());
    });
    const losses = melting.slice(1).map((kg, i) => melting[i] - kg);
    expect(losses[4]).toBeLessThan(0.8 * losses[0]);
  });

  it('freeze at most the water that they hold', () => {
    const bank = bankOf('sealed-containers', { iceKg: 100, waterC: -1 });
    run(bank, 100, { coilOn: true, coolantC: -15 });
    expect(bank.iceKg()).toBeCloseTo(bank.shape.shutKg, 3);
    // Brine stands where the leak of 2.2 W/K from 0 °C meets coil conductance: twice the written 180 W/K.
    expect(bank.layers.meanC()).toBeCloseTo((-15 * 360) / 362.2, 2);
  });
});

describe('level', () => {
  it('rises 90.7 mm for each metre of water frozen on the coil, and not at all for floating ice', () => {
    // Densities of IAPWS: 999.843/916.721 = 1.09067 (published checks 2.9).
    const held = bankOf('ice-on-coil-external', { iceKg: 0, waterC: 0 });
    const iced = bankOf('ice-on-coil-external', { iceKg: 96, waterC: 0 });
    const frozenM = 96 / 1000 / iced.shape.areaM2;
    // Mass stands for litres of water here (density 1,000): 0.02 % of 90.7 mm per metre and 0.16 mm of density.
    expect((iced.levelMm() - held.levelMm()) / frozenM).toBeCloseTo(90.7, 0);
    const floating = bankOf('open-tub', { iceKg: 96, waterC: 0 });
    const water = bankOf('open-tub', { iceKg: 0, waterC: 0 });
    expect(floating.levelMm()).toBeCloseTo(water.levelMm(), 6);
  });
});

describe('an open tub', () => {
  it('loses water and heat to dry air by evaporation', () => {
    const bank = bankOf('open-tub', { iceKg: 0, waterC: 15 });
    const { areaM2 } = bank.shape;
    run(bank, 1, { surroundC: 15, airRatio: 0.004, surfaceRatio: 0.0107 });
    // Lewis: h/cp × area × difference of humidity ratios, h = 4 W/(m² K) over one hour.
    expect(240 - bank.totalKg()).toBeCloseTo((4 / 1006) * areaM2 * 0.0067 * 3600, 4);
    expect(bank.layers.meanC()).toBeLessThan(15);
  });
});
