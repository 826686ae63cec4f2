/** A cabin off the grid: what the battery loses, where its floor holds, when the generator is called, where spare sun goes. */
import { describe, expect, it } from 'vitest';
import { charges } from '../../src/commands.ts';
import { batteryGrid, levelKwh, levelOf } from '../../src/planning/battery-grid.ts';
import { islandOf, settleRow } from '../../src/planning/electricity.ts';
import { newSlot } from '../../src/planning/motion.ts';
import { solvePlan, type Plan } from '../../src/planning/plan.ts';
import type { GeneratorTerms, IslandPower, PlanProblem } from '../../src/planning/problem.ts';
import { fromWall, localClock } from '../../src/time.ts';
import { every, HOUR_MS, plant, problem, scenario } from './problems.ts';

const SLOTS = 144;
const NOON = fromWall('Europe/Madrid', 2026, 7, 1, 12 * 60);
const clock = (t: number): number => (12 + t / 4) % 24;

const generator: GeneratorTerms = {
  powerW: 1500,
  moneyPerKwh: 0.55,
  startMoney: 0,
  quiet: every(SLOTS, (t) => (clock(t) >= 22 || clock(t) < 8 ? 1 : 0)),
  leastRunMs: HOUR_MS / 2,
  startsBelowKwh: 1,
  stopsAtKwh: 3.5,
};

function power(nowKwh: number, parts: Partial<IslandPower> = {}): IslandPower {
  return {
    kind: 'island',
    houseW: every(SLOTS, () => 150),
    battery: {
      capacityKwh: 5,
      floorKwh: 1.5,
      nowKwh,
      wearMoneyPerKwh: 0.06,
      mostChargeW: 2000,
      mostDischargeW: 2000,
      roundTrip: 0.81,
    },
    generator: null,
    inverterW: 3000,
    ...parts,
  };
}

function settled(terms: IslandPower, fromKwh: number, spareW: number, machineKwh: number, mayStart = 1) {
  const out = { batteryKwh: new Float64Array(1), money: new Float64Array(1) };
  const slot = {
    ...newSlot(),
    hours: 0.25,
    panelW: Math.max(0, spareW),
    houseW: Math.max(0, -spareW),
    generator: mayStart,
  };
  const energy = Float64Array.of(machineKwh);
  settleRow(islandOf(terms), slot, fromKwh, energy, energy, 1, out);
  return { batteryKwh: out.batteryKwh[0], money: out.money[0] };
}

describe('a quarter hour on an island', () => {
  it('loses a tenth on the way in and a tenth on the way out of a battery of 81 %', () => {
    expect(settled(power(3), 3, 800, 0).batteryKwh).toBeCloseTo(3 + 0.2 * 0.9, 9);
    const drawn = settled(power(3), 3, -720, 0);
    expect(drawn.batteryKwh).toBeCloseTo(3 - 0.2, 9);
    expect(drawn.money).toBeCloseTo(0.2 * 0.06, 9);
  });

  it('gives the machine nothing from under the floor, and the house all there is', () => {
    // The machine's 0.14 kWh would have to come from beneath: a wall of price, and the battery stays.
    const iced = settled(power(1.5), 1.5, 0, 0.14);
    expect(iced.batteryKwh).toBe(1.5);
    expect(iced.money).toBeGreaterThan(1);
    const lived = settled(power(1.5), 1.5, -360, 0);
    expect(lived.batteryKwh).toBeCloseTo(1.4, 9);
    expect(lived.money).toBeCloseTo(0.1 * 0.06, 9);
  });

  it('is limited by what the battery takes and gives', () => {
    expect(settled(power(3), 3, 4000, 0).batteryKwh).toBeCloseTo(3 + 0.5 * 0.9, 9);
    expect(settled(power(5), 5, -4000, 0).batteryKwh).toBeCloseTo(5 - 0.5 / 0.9, 9);
    expect(settled(power(5), 5, 800, 0).batteryKwh).toBe(5);
  });

  it('pays a generator that the house has called for its whole run, once, and a start', () => {
    const terms = power(1, { generator: { ...generator, startMoney: 0.3 } });
    const called = settled(terms, 1, -360, 0);
    // The house takes 0.1 kWh, to 0.9; from there to 3.5 kWh, in at 90 %.
    expect(called.batteryKwh).toBeCloseTo(3.5, 9);
    expect(called.money).toBeCloseTo(0.1 * 0.06 + ((3.5 - 0.9) / 0.9) * 0.55 + 0.3, 9);
    expect(settled(terms, 1, -360, 0, 0).batteryKwh).toBeCloseTo(0.9, 9);
    // Where it stops early, the shortest run still is 0.75 kWh, of which a quarter hour is 0.375.
    const short = { ...generator, stopsAtKwh: 1 };
    expect(settled(power(1, { generator: short }), 1, -360, 0).batteryKwh).toBeCloseTo(0.9 + 0.375 * 0.9, 9);
  });
});

describe('the levels of the battery', () => {
  it.each([0, 0.2, 1.5, 3, 4.9, 5])(
    'have a floor of %d kWh among them and lead there and back',
    (floorKwh) => {
      const terms = power(3);
      const island = { ...islandOf(terms), floorKwh };
      const grid = batteryGrid(island, 7);
      const levels = Array.from({ length: grid.points }, (_, b) => levelKwh(grid, b));
      expect(levels.some((kwh) => Math.abs(kwh - floorKwh) < 1e-9)).toBe(true);
      expect([levels[0], levels.at(-1)]).toEqual([0, expect.closeTo(5, 9)]);
      levels.forEach((kwh, b) => expect(levelOf(grid, kwh)).toBeCloseTo(b, 9));
      expect(levelOf(grid, 9)).toBe(grid.points - 1);
    },
  );
});

const evening = (t: number, peakW: number): number => {
  const h = (t / 4) % 24;
  return h >= 5 && h <= 13 ? peakW * Math.sin((Math.PI * (h - 5)) / 8) : 0;
};
const sun = (peakW: number) =>
  every(SLOTS, (t) =>
    clock(t) >= 8 && clock(t) < 20 ? peakW * Math.sin((Math.PI * (clock(t) - 8)) / 12) : 0,
  );

function island(panelW: Float64Array, terms: IslandPower, iceKwh: number, peakW: number): PlanProblem {
  return problem(SLOTS, {
    nowMs: NOON,
    iceKwh,
    plant: plant({ capacityKwh: 14, leakW: (ice, c) => 2 * c * Math.min(1, ice / 2) }),
    chiller: { minOnMs: HOUR_MS / 3, minOffMs: HOUR_MS / 6, startMoney: 0.02 },
    power: terms,
    scenarios: Array.from({ length: 8 }, (_, k) =>
      scenario(SLOTS, {
        panelW: panelW.map((w) => w * (0.93 + 0.02 * k)),
        loadW: every(SLOTS, (t) => evening(t, peakW * (0.93 + 0.02 * k))),
      }),
    ),
  });
}

function plan(p: PlanProblem): Plan {
  return solvePlan(p, {
    fallBack: (note) => {
      throw new Error(note);
    },
  });
}

const makingHours = (made: Plan, from: number, to: number): number =>
  made.steps.filter((step) => {
    const h = (step.startMs - NOON) / HOUR_MS;
    return charges(step.command) && h >= from && h < to;
  }).length / 4;

describe('a plan on an island', () => {
  it('turns sun that would be curtailed into ice, though there is enough for every evening foreseen', () => {
    // 1.5 kWh are needed, 4 are there, and tomorrow brings as much sun again.
    const made = plan(island(sun(2000), power(5), 4, 300));
    expect(makingHours(made, 0, 8)).toBeGreaterThan(3);
    expect(made.steps[32].iceKwh).toBeGreaterThan(5);
    // Ice from the battery is another thing: none is made for nothing once the sun has gone.
    expect(makingHours(made, 9, 20)).toBe(0);
  });

  it('has a plan for cloudy days: cools with the ice there is, and spares the battery for the house', () => {
    const made = plan(island(sun(150), power(2.2), 5, 500));
    // The house alone takes 2.1 kWh from 18:00 to 8:00. Making ice would leave it dark before the morning.
    expect(makingHours(made, 6, 20)).toBe(0);
    const cooled = made.steps.filter((step) => step.command === 'discharge');
    expect(cooled.length).toBeGreaterThan(8);
    expect(localClock('Europe/Madrid', cooled[0].startMs) >= '17:00').toBe(true);
  });

  it('makes less ice out of the battery when a generator would have to fill it again', () => {
    const dusk = sun(600);
    const free = plan(island(dusk, power(4), 1, 700));
    const dear = plan(island(dusk, power(4, { generator: { ...generator, moneyPerKwh: 3 } }), 1, 700));
    expect(makingHours(dear, 0, 20)).toBeLessThan(makingHours(free, 0, 20));
  });

  it('starts nothing that the inverter cannot carry', () => {
    const weak = plan({
      ...island(sun(2000), power(5, { inverterW: 900 }), 4, 600),
      chiller: { ...problem(1).chiller, startW: 1500 },
    });
    expect(makingHours(weak, 0, 36)).toBe(0);
  });
});
