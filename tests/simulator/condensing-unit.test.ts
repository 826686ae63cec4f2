import { describe, expect, it } from 'vitest';
import { evaluateMap, LOW_TEMPERATURE_R22 } from '../../src/physics/refrigeration.ts';
import { CondensingUnit } from '../../src/simulator/condensing-unit.ts';
import { juniperAs, simulate, siteNamed, stillAir } from './site.ts';

const CHILLER = siteNamed('juniper').chiller;

/** Runs a machine in steady air against one conductance to a face at 0 °C. */
function settled(outdoorC: number, coilWPerK: number, mostCondensingC = 64): CondensingUnit {
  const unit = new CondensingUnit(CHILLER, mostCondensingC);
  unit.on = true;
  for (let i = 0; i < 200; i++) {
    unit.prepare(10, outdoorC, true);
    unit.meet(coilWPerK, 0);
    unit.tookW(-coilWPerK * unit.coolantC);
  }
  return unit;
}

const mapped = (s: number, d: number) => ({
  coolingW: evaluateMap(LOW_TEMPERATURE_R22.coolingW, s, d),
  powerW: evaluateMap(LOW_TEMPERATURE_R22.powerW, s, d),
});

const copOf = (unit: CondensingUnit, coilWPerK: number): number => (-coilWPerK * unit.coolantC) / unit.powerW;

const roomAfter = (on: boolean): number => {
  const simulator = simulate({
    site: siteNamed('saltmarsh'),
    weather: stillAir(20),
    start: { iceKg: 10, roomC: 22 },
  });
  simulator.switch('chiller', on);
  simulator.advance(simulator.nowMs() + 6 * 3_600_000);
  return simulator.truth().roomC;
};

describe('the scaled map', () => {
  it('gives the nameplate at the nameplate conditions', () => {
    // At −8 °C evaporating a coil that gives 1,050 W has 131.25 W/K.
    const unit = settled(CHILLER.ratedOutdoorC, CHILLER.iceMakingW / -CHILLER.ratedEvaporatingC);
    expect(unit.evaporatingC).toBeCloseTo(CHILLER.ratedEvaporatingC, 2);
    expect(unit.condensingC).toBeCloseTo(35, 2);
    expect(unit.powerW).toBeCloseTo(CHILLER.powerW, 0);
  });

  it('keeps the right slopes where its cubic is extrapolated', () => {
    for (let suction = -30; suction <= 0; suction += 2) {
      for (let discharge = 20; discharge <= 60; discharge += 5) {
        const here = mapped(suction, discharge);
        const warmer = mapped(suction + 1, discharge);
        const hotter = mapped(suction, discharge + 1);
        expect(warmer.coolingW).toBeGreaterThan(here.coolingW);
        expect(warmer.powerW).toBeGreaterThan(here.powerW);
        expect(hotter.coolingW).toBeLessThan(here.coolingW);
        expect(warmer.coolingW / warmer.powerW).toBeGreaterThan(here.coolingW / here.powerW);
        expect(hotter.coolingW / hotter.powerW).toBeLessThan(here.coolingW / here.powerW);
      }
    }
  });

  it('loses capacity and efficiency to thick ice and to hot air', () => {
    const bare = settled(25, 180);
    const thick = settled(25, 60);
    const hot = settled(38, 180);
    expect(thick.evaporatingC).toBeLessThan(bare.evaporatingC - 3);
    expect(copOf(thick, 60)).toBeLessThan(copOf(bare, 180));
    expect(copOf(hot, 180)).toBeLessThan(0.85 * copOf(bare, 180));
  });
});

describe('cut-outs', () => {
  it('opens at high pressure, and closes again after five minutes in mild air', () => {
    const unit = new CondensingUnit(CHILLER, 64);
    unit.on = true;
    unit.prepare(10, 62, true);
    expect(unit.tripped).toBe(true);
    expect(unit.running).toBe(false);
    for (let i = 0; i < 31; i++) unit.prepare(10, 25, true);
    expect(unit.tripped).toBe(false);
    expect(unit.running).toBe(true);
  });

  it('runs at the highest outdoor temperature that the owner allows', () => {
    expect(settled(CHILLER.mostOutdoorC, 180).tripped).toBe(false);
  });

  it('stops at low pressure when the coil gives nothing more', () => {
    const unit = new CondensingUnit(CHILLER, 64);
    unit.on = true;
    let ran = 0;
    for (let i = 0; i < 360; i++) {
      unit.prepare(10, 25, true);
      unit.meet(5, 0);
      if (unit.running) ran++;
    }
    // It tries again every five minutes, and each time for less than a minute.
    expect(ran).toBeGreaterThan(5);
    expect(ran).toBeLessThan(72);
  });
});

describe('in the plant', () => {
  it('makes less ice the more there is on the coil', () => {
    const rates = [10, 70, 140].map((iceKg) => {
      const simulator = simulate({
        site: juniperAs('ice-on-coil-external'),
        weather: stillAir(25),
        start: { iceKg, waterC: 0.1 },
      });
      simulator.switch('chiller', true);
      simulator.advance(simulator.nowMs() + 1_800_000);
      return simulator.truth();
    });
    expect(rates[1].iceMakingW).toBeLessThan(rates[0].iceMakingW);
    expect(rates[2].iceMakingW).toBeLessThan(rates[1].iceMakingW);
    expect(rates[2].evaporatingC).toBeLessThan(rates[0].evaporatingC - 2);
    expect(rates[2].iceMakingW / rates[2].chillerW).toBeLessThan(rates[0].iceMakingW / rates[0].chillerW);
  });

  it('heats the room that it stands in by its ice making and its power together', () => {
    expect(roomAfter(true)).toBeGreaterThan(roomAfter(false) + 1);
  });
});
