import { describe, expect, it } from 'vitest';
import {
  bankLimits,
  bankModel,
  freezeConductanceWPerK,
  iceOnHandKwh,
  levelRiseMm,
  meltConductanceWPerK,
  restingState,
} from '../../src/plant/bank.ts';
import { siteOf } from './site.ts';

const site = siteOf();
const bank = bankModel(site);
const limits = bankLimits(site);

describe('ice on hand', () => {
  it('counts 10.797 kg of ice as one kilowatt-hour (333.43 kJ/kg, IAPWS)', () => {
    const oneMore = iceOnHandKwh(bank, 50 + 10.797, 0) - iceOnHandKwh(bank, 50, 0);
    expect(oneMore).toBeCloseTo(1, 4);
  });

  it('counts 240 L between 0 and 10 °C as 2.8 kWh', () => {
    expect(iceOnHandKwh(bank, 0, 0)).toBeCloseTo(2.8, 2);
    expect(iceOnHandKwh(bank, 0, 10)).toBe(0);
    expect(iceOnHandKwh(bank, 0, 14)).toBe(0);
  });

  it('splits at rest into the ice and water that give the same figure back', () => {
    for (const kwh of [0, 0.5, 2.7, 2.9, 8, 16.6, 18]) {
      const { iceKg, waterC } = restingState(bank, kwh);
      expect(iceOnHandKwh(bank, iceKg, waterC)).toBeCloseTo(kwh, 9);
      expect(iceKg === 0 || waterC === 0).toBe(true);
    }
  });

  it('names a full bank 100 % and its capacity 16.7 kWh', () => {
    expect(limits.capacityKwh).toBeCloseTo(150 / 10.797 + 2.8, 2);
    expect(limits.inventoryPct(limits.capacityKwh)).toBeCloseTo(100, 6);
  });
});

describe('conductances', () => {
  it('have the site file’s melt conductance at half inventory and none without ice', () => {
    expect(meltConductanceWPerK(bank, 0.5)).toBeCloseTo(450, 6);
    expect(meltConductanceWPerK(bank, 0)).toBe(0);
    expect(meltConductanceWPerK(bank, Number.NaN)).toBe(0);
  });

  it('follow the published external-melt polynomial within 15 % from 25 to 75 % inventory', () => {
    // Henze & Krarti 2002: y = 0.25/0.5/0.75 give 0.5398/0.4042/0.3051. A power law is straight in logarithms where the
    // polynomial bends; the estimator's bend term covers the rest.
    for (const [inventory, published] of [
      [0.75, 0.5398],
      [0.5, 0.4042],
      [0.25, 0.3051],
    ]) {
      const ratio = meltConductanceWPerK(bank, inventory) / meltConductanceWPerK(bank, 0.5);
      expect(Math.abs(ratio / (published / 0.4042) - 1)).toBeLessThan(0.15);
    }
  });

  it('fall monotonically with less ice to melt and with more ice to freeze through', () => {
    for (let inventory = 0; inventory < 1; inventory += 0.01) {
      expect(meltConductanceWPerK(bank, inventory + 0.01)).toBeGreaterThan(
        meltConductanceWPerK(bank, inventory),
      );
      expect(freezeConductanceWPerK(bank, inventory + 0.01)).toBeLessThan(
        freezeConductanceWPerK(bank, inventory),
      );
    }
    expect(freezeConductanceWPerK(bank, 0)).toBe(180);
  });
});

describe('level', () => {
  it('rises 90.7 mm for each metre of water frozen and held (IAPWS densities)', () => {
    const metreKg = 999.843 * 0.32;
    expect(levelRiseMm(bank, metreKg)).toBeCloseTo(90.7, 1);
  });

  it('does not move with floating ice (Archimedes)', () => {
    expect(levelRiseMm(bankModel(siteOf('open-tub')), 80)).toBe(0);
  });
});

describe('limits', () => {
  it('leak nothing without a difference and the site file’s figure for each kelvin', () => {
    expect(limits.leakW(limits.capacityKwh, 0)).toBe(0);
    expect(limits.leakW(limits.capacityKwh, 22)).toBeCloseTo(2.2 * 22, 9);
  });

  it('deliver less with less ice, nothing to a room as cold as the water, never more than the coil takes', () => {
    const coilLimitW = 180 * 26;
    let before = 0;
    for (let kwh = 0; kwh <= limits.capacityKwh; kwh += 0.5) {
      const now = limits.meltLimitW(kwh, 26);
      expect(now).toBeGreaterThanOrEqual(before);
      expect(now).toBeLessThan(coilLimitW);
      before = now;
    }
    expect(limits.meltLimitW(0, 10)).toBe(0);
    expect(limits.meltLimitW(10, -1)).toBe(0);
  });

  it('take learned figures for nominal ones', () => {
    const learned = bankLimits(site, { meltGain: 0.5, heatLeakWPerK: 4.4 });
    expect(learned.leakW(10, 20)).toBeCloseTo(88, 9);
    expect(learned.meltLimitW(9, 26)).toBeLessThan(limits.meltLimitW(9, 26));
  });
});
