import { describe, expect, it } from 'vitest';
import { bankModel, freezeConductanceWPerK } from '../../src/plant/bank.ts';
import { iceMachine } from '../../src/plant/ice-machine.ts';
import { siteOf } from './site.ts';

const site = siteOf();
const machine = iceMachine(site);

describe('ice machine', () => {
  it('meets the nameplate with little ice at the rated outdoor temperature', () => {
    const { iceMakingW, powerW } = machine.operate(25, 0);
    expect(iceMakingW).toBeCloseTo(1050, 6);
    expect(powerW).toBeCloseTo(550, 6);
    expect(machine.evaporatingC(25, 180, 0)).toBeCloseTo(-8, 6);
  });

  it('makes less ice for more power through a charge and on a hot afternoon', () => {
    for (const outdoorC of [10, 20, 30, 40]) {
      for (let inventory = 0; inventory < 100; inventory += 10) {
        const now = machine.operate(outdoorC, inventory);
        const later = machine.operate(outdoorC, inventory + 10);
        const hotter = machine.operate(outdoorC + 2, inventory);
        expect(later.iceMakingW).toBeLessThan(now.iceMakingW);
        expect(hotter.iceMakingW).toBeLessThan(now.iceMakingW);
        expect(later.iceMakingW / later.powerW).toBeLessThan(now.iceMakingW / now.powerW);
        expect(hotter.iceMakingW / hotter.powerW).toBeLessThan(now.iceMakingW / now.powerW);
      }
    }
  });

  it('closes its balance: capacity is the conductance times the difference, in series with the evaporator', () => {
    const bank = bankModel(site);
    const bareKPerW = 8 / 1050;
    for (const inventory of [0, 0.3, 0.8]) {
      const conductance = freezeConductanceWPerK(bank, inventory);
      const { evaporatingC, iceMakingW } = machine.balance(30, conductance, 0);
      const seriesKPerW = bareKPerW - 1 / 180 + 1 / conductance;
      expect(iceMakingW * seriesKPerW).toBeCloseTo(-evaporatingC, 9);
    }
  });

  it('reproduces a published compressor map within 3 % of COP when anchored at one of its points', () => {
    // Low-temperature R-22 polynomial (public data set of compressor curves, first entry), suction/discharge °C:
    // (−20, 35) 10,030 W and 3,936 W; the others computed from its coefficients. The share of Carnot is
    // linear in both temperatures, which over 10 K leaves under 3 %.
    const anchored = iceMachine(
      siteOf(
        'ice-on-coil-external',
        { 'freeze-conductance': '2000 W/K' },
        {
          chiller: {
            'ice-making': '10.03 kW',
            power: '3.936 kW',
            'rated-evaporating': '-20 degC',
            'rated-outdoor': '23 degC',
          },
        },
      ),
    );
    for (const [suctionC, dischargeC, cop] of [
      [-20, 35, 2.548],
      [-25, 35, 2.213],
      [-20, 40, 2.371],
      [-30, 40, 1.779],
    ]) {
      expect(Math.abs(anchored.cop(suctionC, dischargeC - 12) / cop - 1)).toBeLessThan(0.03);
    }
  });
});
