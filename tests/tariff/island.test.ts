import { describe, expect, it } from 'vitest';
import { HOUR_MS } from '../../src/time.ts';
import { islandSlots, type IslandSlot } from '../../src/tariff/island.ts';
import { siteWith, utc } from './site.ts';

const island = {
  panels: '2.4 kW',
  inverter: '3 kW',
  battery: {
    capacity: '5 kWh',
    floor: '30 %',
    wear: '0.06 EUR/kWh',
    'most-charge': '2 kW',
    'most-discharge': '2 kW',
  },
};
const generator = { power: '2 kW', 'fuel-price': '0.55 EUR/kWh', 'quiet-from': '22:00', 'quiet-to': '08:00' };

/** Hourly slots from noon local time of a July day in Spain. */
function outlook(power: unknown, panelW: number[], batteryPct: number | null, houseW = 150): IslandSlot[] {
  return islandSlots(siteWith({ island: power }), {
    startMs: utc('2026-07-15T10:00Z'),
    slotMs: HOUR_MS,
    panelW,
    houseW: panelW.map(() => houseW),
    batteryPct,
  });
}

describe('island prices', () => {
  it('gives away what would be curtailed: full battery, sun above the house', () => {
    const [first] = outlook(island, [1650], 100);
    expect(first).toMatchObject({ period: 'sun', freeW: 1500 });
    expect(first.buy).toBe(0.06);
  });

  it('counts only wear where the sun fills the battery again before it is missed', () => {
    const slots = outlook(island, [150, 2150, 2150, 2150], 80);
    expect(slots[0]).toMatchObject({ period: 'battery', buy: 0.06 });
    expect(slots[2].period).toBe('sun');
  });

  it('counts fuel where the floor comes first, and the generator at once where it may run', () => {
    const night = outlook(
      { ...island, generator },
      Array.from({ length: 20 }, () => 0),
      60,
      400,
    );
    expect(night[0]).toMatchObject({ period: 'generator', buy: 0.55 });
    const quiet = night[10]; // 22:00
    expect(quiet.mostW).toBe(0); // at the floor, and the generator must be silent
    expect(quiet).toMatchObject({ period: 'none', buy: null });
  });

  it('sells nothing that a later floor would miss without a generator', () => {
    const night = outlook(
      island,
      Array.from({ length: 20 }, () => 0),
      60,
      400,
    );
    expect(night[0]).toMatchObject({ period: 'none', buy: null, mostW: 0 });
  });

  it('never offers the battery below its floor, and counts an unheard battery as at its floor', () => {
    for (const slots of [outlook(island, [0, 0, 0], 31, 0), outlook(island, [0, 0], null, 0)]) {
      for (const slot of slots) {
        expect(slot.mostW).toBeLessThanOrEqual((slot.batteryKwh - 1.5) * 1000 + 1e-9);
        expect(slot.batteryKwh).toBeGreaterThanOrEqual(1.5);
      }
    }
  });

  it('respects the inverter', () => {
    const [first] = outlook({ ...island, inverter: '600 W' }, [2400], 100);
    expect(first.mostW).toBe(450);
  });

  it('conserves energy: what the sun gives is used, stored or free', () => {
    const panelW = [400, 900, 2300, 2300, 1800, 600, 100, 0];
    const slots = outlook(island, panelW, 40);
    for (const [i, slot] of slots.slice(0, -1).entries()) {
      const stored = (slots[i + 1].batteryKwh - slot.batteryKwh) * 1000;
      expect(panelW[i] - 150).toBeCloseTo(stored + slot.freeW, 6);
    }
  });

  it('is empty on a site with a grid', () => {
    expect(
      islandSlots(siteWith({ tariff: { default: 0.2 } }), {
        startMs: 0,
        slotMs: HOUR_MS,
        panelW: [1],
        houseW: [0],
        batteryPct: null,
      }),
    ).toEqual([]);
  });
});
