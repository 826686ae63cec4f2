import { describe, expect, it } from 'vitest';
import type { SiteConfig } from '../../src/config.ts';
import { drawParameters } from '../../src/simulator/parameters.ts';
import { createRandom } from '../../src/numerics/random.ts';
import type { Simulator } from '../../src/simulator/simulator.ts';
import { DAY_MS, HOUR_MS } from '../../src/time.ts';
import { juniperAs, simulate, siteNamed, START_MS, stillAir } from './site.ts';

const SITE = siteNamed('juniper');
/** Some of these run for simulated weeks; a machine shared by many may take long over them. */
const PATIENCE = { timeout: 90_000 };

function evening(simulator: Simulator): void {
  simulator.switch('pump', true);
  simulator.switch('fan', true);
}

const sixHours = (): unknown => {
  const simulator = simulate({ site: SITE, seed: 11, truth: {} });
  evening(simulator);
  return [simulator.advance(START_MS + 6 * HOUR_MS), simulator.truth()];
};

const leakWPerK = (truth: object): number => {
  const simulator = simulate({ site: SITE, truth, weather: stillAir(24), start: { iceKg: 100 } });
  simulator.advance(START_MS + 2 * DAY_MS);
  const { leakW: watts, surroundC } = simulator.truth();
  return watts / surroundC;
};

const powerAtCop = (copFactor: number): number => {
  const simulator = simulate({ site: SITE, truth: { copFactor }, weather: stillAir(25) });
  simulator.switch('chiller', true);
  simulator.advance(START_MS + HOUR_MS);
  return simulator.truth().chillerW;
};

const roomsAfter = (cooled: boolean) => {
  const simulator = simulate({ site: SITE, start: { iceKg: 140, roomC: 28 } });
  if (cooled) evening(simulator);
  simulator.advance(START_MS + 4 * HOUR_MS);
  return simulator.truth();
};

describe('one seed', () => {
  it('gives one plant, reading for reading', () => {
    expect(sixHours()).toEqual(sixHours());
  });

  it('gives the same readings however the time is cut up', () => {
    const whole = simulate({ site: SITE, seed: 12, truth: {} });
    const cut = simulate({ site: SITE, seed: 12, truth: {} });
    evening(whole);
    evening(cut);
    const once = whole.advance(START_MS + 2 * HOUR_MS);
    const pieces = [];
    for (let ms = START_MS + 7000; ms < START_MS + 2 * HOUR_MS; ms += 7000) pieces.push(...cut.advance(ms));
    pieces.push(...cut.advance(START_MS + 2 * HOUR_MS));
    const byTime = (all: typeof once) =>
      all.toSorted((a, b) => a.atMs - b.atMs || a.point.localeCompare(b.point));
    expect(byTime(pieces)).toEqual(byTime(once));
    expect(cut.truth()).toEqual(whole.truth());
  });

  it('draws another plant than the next seed, and keeps the others when one factor is set', () => {
    const one = drawParameters(createRandom(1), {});
    const two = drawParameters(createRandom(2), {});
    const set = drawParameters(createRandom(1), { leakFactor: 2 });
    expect(one.leakFactor).not.toBe(two.leakFactor);
    expect(set).toEqual({ ...one, leakFactor: 2 });
  });
});

describe('the plant as written and as it ages', PATIENCE, () => {
  it('leaks what the leak factor and its drift say', () => {
    const written = leakWPerK({ leakFactor: 1 });
    // The water stands some tenths above 0 °C, and higher with the greater leak: a few per cent less than in proportion.
    const doubled = leakWPerK({ leakFactor: 2 }) / written;
    expect(doubled).toBeGreaterThan(1.9);
    expect(doubled).toBeLessThan(2);
    const aged = leakWPerK({ leakFactor: 1, driftPerDay: { leakFactor: 0.1 } }) / written;
    expect(aged).toBeGreaterThan(1.16);
    expect(aged).toBeLessThan(1.2);
  });

  it('takes more electricity for the same cold with a poor COP', () => {
    expect(powerAtCop(0.8) / powerAtCop(1)).toBeCloseTo(1.25, 1);
  });

  it('warns of high pressure and does not run in air that is far too hot', () => {
    const site: SiteConfig = {
      ...SITE,
      points: { ...SITE.points, 'high-pressure-trip': SITE.points['fan-power'] },
    };
    const simulator = simulate({ site, weather: stillAir(58, 10) });
    simulator.switch('chiller', true);
    const all = simulator.advance(START_MS + HOUR_MS);
    expect(all.some(({ point, value }) => point === 'high-pressure-trip' && value === 1)).toBe(true);
    expect(simulator.truth().totals.chillerKwh).toBeLessThan(0.06);
  });
});

describe('the cabin', PATIENCE, () => {
  it('is cooled by ice, and dried where the coil is wet', () => {
    expect(roomsAfter(true).roomC).toBeLessThan(roomsAfter(false).roomC - 2);
    expect(roomsAfter(true).condensateKg).toBeGreaterThan(0);
  });

  it('settles where heat lost through fabric and air equals what is put in', () => {
    const site: SiteConfig = { ...SITE, cabin: { ...SITE.cabin, occupants: 0 } };
    const simulator = simulate({ site, weather: stillAir(20), truth: { infiltrationPerH: 0.5 } });
    simulator.setOccupied(false);
    simulator.advance(START_MS + 14 * DAY_MS);
    const { roomC, houseW } = simulator.truth();
    // Free heat: 70 % of the house's load; 115 W/K with leakage; the bank, by then at room temperature, takes none.
    expect(houseW).toBeGreaterThan(50);
    expect(roomC - 20).toBeGreaterThan((0.6 * 0.7 * houseW) / 115);
    expect(roomC - 20).toBeLessThan((1.4 * 0.7 * houseW) / 115);
  });

  it('is warmer under its roof on a sunny afternoon', () => {
    const simulator = simulate({ site: SITE, start: { roomC: 25 } });
    simulator.advance(START_MS + 4 * HOUR_MS);
    const [mainC, loftC] = simulator.truth().roomsC;
    expect(loftC).toBeGreaterThan(mainC + 0.2);
  });

  it('grows damp from people and from an open tub, and airs when a window opens', () => {
    const dry = simulate({ site: SITE, weather: stillAir(24, 15) });
    const tub = simulate({
      site: juniperAs('open-tub'),
      weather: stillAir(24, 15),
      start: { iceKg: 0, waterC: 18 },
    });
    const aired = simulate({ site: SITE, weather: stillAir(24, 15) });
    dry.setOccupied(true);
    tub.setOccupied(true);
    aired.setOccupied(true);
    aired.openWindow(true);
    for (const simulator of [dry, tub, aired]) simulator.advance(START_MS + DAY_MS);
    expect(tub.truth().evaporatedKg).toBeGreaterThan(0.05);
    expect(tub.truth().roomRhPct).toBeGreaterThan(dry.truth().roomRhPct);
    expect(aired.truth().roomRhPct).toBeLessThan(dry.truth().roomRhPct - 2);
  });

  it('has people home in the home hours, give or take, and empty days between', () => {
    const simulator = simulate({ site: SITE, truth: {} });
    let atNight = 0;
    let atNoon = 0;
    for (let day = 0; day < 8; day++) {
      // Local time is UTC+2 in July: home from 16:30 to 09:30.
      simulator.advance(START_MS + day * DAY_MS);
      if (simulator.truth().home) atNoon++;
      simulator.advance(START_MS + day * DAY_MS + 13 * HOUR_MS);
      if (simulator.truth().home) atNight++;
    }
    expect(atNoon).toBe(0);
    expect(atNight).toBe(8);
  });
});

describe('an island', PATIENCE, () => {
  it('lives from sun, battery and generator, and never below empty', () => {
    const simulator = simulate({ site: siteNamed('juniper-island'), truth: {} });
    let panelKwh = 0;
    let least = 100;
    for (let quarter = 0; quarter < 4 * 24 * 4; quarter++) {
      simulator.switch('chiller', quarter % 96 < 24 || quarter % 96 > 80);
      simulator.advance(simulator.nowMs() + HOUR_MS / 4);
      const truth = simulator.truth();
      panelKwh += truth.panelW / 4000;
      least = Math.min(least, truth.batteryPct);
      expect(truth.batteryPct).toBeLessThanOrEqual(100 + 1e-9);
    }
    // 2.4 kWp in July: some 5 to 6 peak-hours a day when nothing is curtailed.
    expect(panelKwh / 4).toBeGreaterThan(3);
    expect(panelKwh / 4).toBeLessThan(15);
    expect(least).toBeGreaterThanOrEqual(0);
  });

  it('goes dark when everything is empty', () => {
    const site = siteNamed('juniper-island');
    const island = site.power.island;
    const bare = island && { ...island, generator: null, panelsW: 0 };
    const simulator = simulate({ site: { ...site, power: { ...site.power, island: bare } } });
    simulator.switch('chiller', true);
    simulator.advance(START_MS + DAY_MS);
    expect(simulator.truth().powered).toBe(false);
    expect(simulator.truth().chillerW).toBe(0);
  });

  it('does not start a machine whose surge the inverter cannot carry', () => {
    const site = siteNamed('juniper-island');
    const heavy = { ...site, chiller: { ...site.chiller, startW: 4000 } };
    const simulator = simulate({ site: heavy });
    simulator.switch('chiller', true);
    simulator.advance(START_MS + HOUR_MS);
    expect(heavy.power.island?.inverterW).toBeLessThan(4000);
    expect(simulator.truth().totals.chillerKwh).toBe(0);
  });
});

describe('a pump that draws air', () => {
  it("moves nothing and takes less power than the owner's dry-pump limit", () => {
    const simulator = simulate({ site: SITE, start: { iceKg: 60 } });
    simulator.switch('pump', true);
    simulator.dryPump(true);
    simulator.advance(START_MS + HOUR_MS / 4);
    const { flowLPerMin, pumpW } = simulator.truth();
    expect(flowLPerMin).toBe(0);
    expect(pumpW).toBeGreaterThan(SITE.delivery.runningAboveW);
    expect(pumpW).toBeLessThan(SITE.delivery.dryPumpW ?? 0);
  });
});
