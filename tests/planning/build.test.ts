/** From the example site files to plan problems. */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import type { SiteConfig } from '../../src/config.ts';
import { planProblem, type PlanInputs } from '../../src/planning/build.ts';
import { faultOf, slotHours, slotStartMs } from '../../src/planning/problem.ts';
import { parseSiteFile } from '../../src/site-file.ts';
import { fromWall } from '../../src/time.ts';
import { every, scenario } from './problems.ts';

const SLOTS = 144;
const NOW = fromWall('Europe/Madrid', 2026, 7, 1, 21 * 60 + 20);

function site(file: string): SiteConfig {
  const read = parseSiteFile(readFileSync(new URL(`../../config/${file}`, import.meta.url), 'utf8'));
  if (!read.ok) throw new Error(JSON.stringify(read.faults));
  return read.config;
}

const inputs: PlanInputs = {
  nowMs: NOW,
  iceOnHandKwh: 5,
  lowKwh: 4,
  highKwh: 6,
  scenarios: [scenario(SLOTS)],
  prices: Array.from({ length: SLOTS }, (_, t) => ({ buy: t / 1000, sell: 0 })),
  roomC: 25,
  homeNow: true,
  chillerOn: false,
  chillerSinceMs: null,
  surroundC: null,
  houseW: null,
  batteryPct: null,
  demand: null,
};

describe('building a problem', () => {
  const config = site('juniper.yaml');

  it('lays slots from the one that holds now, the first one partly over', () => {
    const p = planProblem(config, inputs);
    expect(faultOf(p)).toBeNull();
    expect(p.slots).toBe(SLOTS);
    expect(slotHours(p, 0)).toBeCloseTo(10 / 60, 9);
    expect(slotHours(p, 1)).toBe(0.25);
    expect(slotStartMs(p, 0)).toBe(NOW);
    expect(slotStartMs(p, 1)).toBe(NOW + 600_000);
  });

  it('holds the sleeping limit in the sleeping hours', () => {
    const { comfort } = config;
    const p = planProblem(config, inputs);
    // Slot 0 is 21:15; 23:00 is slot 7, 07:00 is slot 39.
    expect(p.limitC[6]).toBe(comfort.limitC);
    expect(p.limitC[7]).toBe(comfort.sleepingLimitC);
    expect(p.limitC[38]).toBe(comfort.sleepingLimitC);
    expect(p.limitC[39]).toBe(comfort.limitC);
  });

  it('is no longer than what is known of prices and weather', () => {
    expect(planProblem(config, { ...inputs, prices: inputs.prices.slice(0, 40) }).slots).toBe(40);
    expect(planProblem(config, { ...inputs, scenarios: [scenario(50)] }).slots).toBe(50);
    expect(faultOf(planProblem(config, { ...inputs, prices: [] }))).toBe('there are no slots to plan');
  });

  it('takes the house as a mean or slot by slot', () => {
    const mean = planProblem(config, { ...inputs, houseW: 200 });
    const course = planProblem(config, { ...inputs, houseW: every(SLOTS, (t) => 100 + t) });
    expect([mean.power.houseW[9], course.power.houseW[9]]).toEqual([200, 109]);
  });

  it('knows floor, quiet hours and a battery that is not heard on an island', () => {
    const island = site('juniper-island.yaml');
    const { power } = planProblem(island, inputs);
    if (power.kind !== 'island' || !power.battery || !power.generator) throw new Error('no island');
    expect(power.battery.floorKwh).toBeCloseTo(1.5, 9);
    expect(power.battery.nowKwh).toBeCloseTo(1.5, 9);
    // Quiet from 22:00 (slot 3) to 08:00 (slot 43); a run of half an hour from 21:45 on would reach into it.
    expect([1, 2, 3, 42, 43].map((t) => power.generator?.quiet[t])).toEqual([0, 1, 1, 1, 0]);
  });

  it('believes in the panels before they have shown anything', () => {
    const island = site('juniper-island.yaml');
    const sun = { ...scenario(SLOTS), sunWPerM2: every(SLOTS, () => 500) };
    const [first] = planProblem(island, { ...inputs, scenarios: [sun] }).scenarios;
    expect(first.panelW[10]).toBeGreaterThan(0.7 * 1200);
    expect(first.panelW[10]).toBeLessThan(1200);
    const seen = { ...sun, panelW: every(SLOTS, () => 300) };
    expect(planProblem(island, { ...inputs, scenarios: [seen] }).scenarios[0].panelW[10]).toBe(300);
  });

  it('plans with the machine and the ice as they have shown themselves', () => {
    const learned = { powerGain: 1.1, copGain: 0.9, copByOutdoor: -0.05, copByInventory: 0.1, meltGain: 0.5 };
    const known = planProblem(config, { ...inputs, learned }).plant;
    const nominal = planProblem(config, inputs).plant;
    const [seen, told] = [known.operate(35, 50), nominal.operate(35, 50)];
    expect(seen.powerW).toBeCloseTo(1.1 * told.powerW, 9);
    // 10 K over the rating of 25 °C, half full.
    expect(seen.iceMakingW).toBeCloseTo(told.iceMakingW * 1.1 * 0.9 * Math.exp(-0.05 + 0.05), 9);
    expect(known.meltLimitW(6, 26)).toBeLessThan(nominal.meltLimitW(6, 26));
  });

  it('tells a machine that stands in the cooled room', () => {
    expect(planProblem(site('saltmarsh.yaml'), inputs).chiller.heatsRoom).toBe(true);
    expect(planProblem(config, inputs).chiller.heatsRoom).toBe(false);
  });
});
