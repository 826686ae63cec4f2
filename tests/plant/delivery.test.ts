import { describe, expect, it } from 'vitest';
import { deliveryModel, wetFactor } from '../../src/plant/delivery.ts';
import { siteOf } from './site.ts';

const delivery = deliveryModel(siteOf());

describe('delivery', () => {
  it('carries 840 W/K at 12 L/min of water, less with the glycol of an internal-melt loop', () => {
    expect(delivery.loopWPerK).toBeCloseTo(840, 6);
    expect(deliveryModel(siteOf('ice-on-coil-internal')).loopWPerK).toBeCloseTo(770, 6);
  });

  it('gives the coil no more than the air can carry and nothing without flow', () => {
    const airWPerK = (700 / 3600) * 1207;
    expect(delivery.coilWPerK(840, 1)).toBeLessThan(Math.min(180, airWPerK));
    expect(delivery.coilWPerK(840, 1e6)).toBeCloseTo(airWPerK, 6);
    expect(delivery.coilWPerK(0, 1)).toBe(0);
  });

  it('solves melt side and coil side together: the loop closes', () => {
    const heatW = delivery.deliverableW(300, 0, 26);
    const leavingC = heatW / delivery.coilWPerK(840, 1) - 26;
    const enteringC = -leavingC + heatW / 840;
    expect(-leavingC).toBeCloseTo(enteringC * Math.exp(-300 / 840), 9);
  });

  it('wets the coil only below the dew point', () => {
    expect(wetFactor(26, 0.005, 10, 0.0076)).toBe(1);
    // 26 °C, 60 %: 0.0126 kg/kg; saturated at 10 °C 0.0077 (PsychroLib): latent 4.9e-3·2.5e6/1006 = 12.2 K beside 16 K.
    expect(wetFactor(26, 0.0126, 10, 0.0077)).toBeCloseTo(1 + 12.18 / 16, 2);
    expect(wetFactor(26, 0.02, 25.9, 0.0077)).toBe(1);
  });
});
