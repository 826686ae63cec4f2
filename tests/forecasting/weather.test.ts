import { describe, expect, it } from 'vitest';
import type { SiteConfig } from '../../src/config.ts';
import { fitAnomaly, predictAnomaly } from '../../src/forecasting/anomaly.ts';
import { hourBins, type HourSeries } from '../../src/forecasting/bins.ts';
import { blendAt, blended, hubByLead, learnBlends } from '../../src/forecasting/blend.ts';
import { designBinsC, seasonK } from '../../src/forecasting/design-weather.ts';
import type { HourLine } from '../../src/forecasting/hour-line.ts';
import { HourGatherer, type Observed } from '../../src/forecasting/hours.ts';
import { keepIssue, type Issue } from '../../src/forecasting/issues.ts';
import { addRow, normalEquations, solveNormal } from '../../src/forecasting/normal-equations.ts';
import { drawTrajectories } from '../../src/forecasting/trajectories.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { HOUR_MS } from '../../src/time.ts';
import { cabinSite, MIDSUMMER_MS, record } from './site.ts';

const FIRST = MIDSUMMER_MS / HOUR_MS;
const FADING = { quick: 0.85, slowHours: 60, share: 1, rows: 16 };
const flat = Array.from({ length: 24 }, () => 20);

/** A daily wave with offsets of each day that keep 60 % of themselves from one day to the next. */
function wave(days: number, seed: number, spread = 2): HourSeries {
  const random = createRandom(seed);
  let offset = 0;
  const values = Array.from({ length: days * 24 }, (_, i) => {
    if (i % 24 === 0) offset = 0.6 * offset + spread * random.normal();
    return 22 + offset + 6 * Math.sin(((i - 9) * Math.PI) / 12);
  });
  return { firstHour: FIRST, values };
}

describe('least squares with a prior', () => {
  it('finds a line through exact points when the prior is weak, and the prior without any', () => {
    const equations = normalEquations([0, 0], [1e-9, 1e-9]);
    for (const x of [1, 2, 5]) addRow(equations, [1, x], 3 + 2 * x, 1);
    expect(Array.from(solveNormal(equations) ?? [])[1]).toBeCloseTo(2, 6);
    expect(Array.from(solveNormal(normalEquations([4, 5], [1, 1])) ?? [])).toEqual([4, 5]);
  });
  it('is null on NaN', () => {
    const equations = normalEquations([0], [1]);
    addRow(equations, [Number.NaN], 1, 1);
    expect(solveNormal(equations)).toBeNull();
  });
});

describe('bins', () => {
  it('are the prior lifted to the readings at first and the measured hours later', () => {
    const one = hourBins({ firstHour: FIRST, values: [26, 26, 26] }, flat);
    expect(one[12]).toBeCloseTo(20 + 6 * 0.5, 6);
    const many = hourBins(wave(45, 1, 0), flat);
    // the prior keeps the weight of 3 days against the faded weight of 45 days, 18: within a seventh of 6 K
    for (let hour = 0; hour < 24; hour += 1) {
      expect(Math.abs(many[hour] - (22 + 6 * Math.sin(((hour - 9) * Math.PI) / 12)))).toBeLessThan(0.9);
    }
  });
  it('pass over gaps', () => {
    const values = wave(20, 2, 0).values.map((value, i) => (i % 3 === 0 ? null : value));
    expect(hourBins({ firstHour: FIRST, values }, flat).every(Number.isFinite)).toBe(true);
  });
});

describe("today's offset", () => {
  it('lets a warm day fade as days of this site do', () => {
    const series = wave(40, 7);
    const model = fitAnomaly(series, flat, null, FADING, 36);
    const warm = {
      firstHour: FIRST,
      values: [...series.values.slice(0, -24), ...series.values.slice(-24).map((v) => (v ?? 0) + 5)],
    };
    const lift = predictAnomaly(model, warm, null).map(
      (value, i) => value - predictAnomaly(model, series, null)[i],
    );
    // the truth keeps 60 % into the next day; trained on 40 days of it
    expect(lift[11] / 5).toBeGreaterThan(0.35);
    expect(lift[11] / 5).toBeLessThan(0.85);
  });

  it('beats bins alone and yesterday on days that it has not seen', () => {
    let [own, bins, yesterday] = [0, 0, 0];
    const whole = wave(60, 9);
    for (let day = 35; day < 59; day += 1) {
      const seen = { firstHour: FIRST, values: whole.values.slice(0, day * 24) };
      const model = fitAnomaly(seen, flat, null, FADING, 24);
      const ahead = predictAnomaly(model, seen, null);
      for (let i = 0; i < 24; i += 1) {
        const came = whole.values[day * 24 + i] ?? 0;
        own += (ahead[i] - came) ** 2;
        bins += (model.bins[i] - came) ** 2;
        yesterday += ((whole.values[day * 24 + i - 24] ?? 0) - came) ** 2;
      }
    }
    expect(own).toBeLessThan(bins);
    expect(own).toBeLessThan(yesterday);
  });

  it('gives the bins where nothing was heard for a day', () => {
    const gap = {
      firstHour: FIRST,
      values: [...wave(10, 3).values, ...Array.from({ length: 30 }, () => null)],
    };
    const model = fitAnomaly(gap, flat, null, FADING, 3);
    expect(Array.from(predictAnomaly(model, gap, null))).toEqual(
      [0, 1, 2].map((lead) => model.bins[(10 * 24 + 30 + lead) % 24]),
    );
  });
});

const hourOf = (text: string): number => Date.parse(text) / HOUR_MS;

describe('a site without history', () => {
  it('has a day of the design range whose top is in the afternoon of the sun', () => {
    const bins = designBinsC(cabinSite());
    // ASHRAE Fundamentals 2009, chapter 14, table 6: least fraction at 14:00 and 15:00, 1.00 at 5:00 of the summer clock
    expect(Math.max(...bins) - Math.min(...bins)).toBeGreaterThan(15);
    expect([13, 14]).toContain(bins.indexOf(Math.max(...bins)));
    expect(Math.max(...bins)).toBeCloseTo(36 - 4, 0);
  });
  it('is coolest half a year from midsummer, on either side of the equator', () => {
    const south = cabinSite({
      site: { id: 's', name: 's', zone: 'UTC', latitude: '-38 deg', longitude: '0 deg' },
    });
    expect(seasonK(cabinSite(), hourOf('2026-01-18T00:00Z'))).toBeLessThan(-15);
    expect(seasonK(south, hourOf('2026-01-18T00:00Z'))).toBeGreaterThan(-0.5);
    expect(seasonK(cabinSite(), hourOf('2026-07-20T00:00Z'))).toBeGreaterThan(-0.1);
  });
});

const actual = (hour: number): number => 20 + (hour % 24) / 4;

describe("a hub's forecast", () => {
  const random = createRandom(11);
  const issues = (count: number, hubBias: number, hubSd: number, ownSd: number): Issue[] =>
    Array.from({ length: count }, (_, n) => {
      const hour = FIRST + n * 3;
      const [hubOff, ownOff] = [hubBias + hubSd * random.normal(), ownSd * random.normal()];
      const leads = Array.from({ length: 12 }, (__, i) => actual(hour + i + 1));
      return {
        hour,
        outdoorC: leads.map((c) => c - ownOff),
        hubC: leads.map((c) => c - hubOff),
        dewC: [],
        skyScore: [],
      };
    });

  it('is freed of its bias and weighed by what both were worth', () => {
    const blends = learnBlends(issues(400, 1.5, 1, 2), actual, 12);
    expect(blendAt(blends, 1).biasK).toBeCloseTo(1.5, 0);
    // Bates & Granger 1969: errors without correlation are weighed by the inverse of their variances, 4 : 1
    expect(blendAt(blends, 7).hubWeight).toBeGreaterThan(0.7);
    expect(blendAt(blends, 7).hubWeight).toBeLessThan(0.9);
    expect(blended(blends, 1, 10, null)).toBe(10);
  });

  it('counts for little before it was compared with anything, but for something', () => {
    const [blend] = learnBlends([], actual, 12);
    expect(blend).toMatchObject({ biasK: 0, issues: 0 });
    expect(blend.hubWeight).toBeCloseTo(9 / 13, 6);
  });

  it('is read at the middle of each hour, linear between its points, and is absent outside them', () => {
    const at = (hours: number): number => (FIRST + hours) * HOUR_MS;
    const series = [
      { atMs: at(4), temperatureC: 30 },
      { atMs: at(2), temperatureC: 20 },
      { atMs: at(3), temperatureC: Number.NaN },
    ];
    expect(hubByLead(series, FIRST, 5)).toEqual([null, 22.5, 27.5, null, null]);
    expect(hubByLead([], FIRST, 2)).toEqual([null, null]);
  });
});

const happened = (error: number) => ({
  outdoor: () => error,
  dew: () => null,
  skyScore: () => 0.1,
  disturbance: () => 20,
});

const issue = (hour: number): Issue => ({ hour, outdoorC: [], dewC: [], skyScore: [], hubC: null });

const draw = (seed: number) => drawTrajectories([], happened(0), FIRST, 36, 400, createRandom(seed));

describe('error trajectories', () => {
  it('are whole ones of the past at this time of day, once they are complete', () => {
    const past = Array.from({ length: 100 }, (_, n) => issue(FIRST + n * 3));
    const now = FIRST + 300;
    const drawn = drawTrajectories(past, happened(2), now, 36, 8, createRandom(1));
    for (const trajectory of drawn) {
      expect(Array.from(trajectory.outdoorC)).toEqual(Array.from({ length: 36 }, () => 2));
      expect(trajectory.dewC.every((value) => value === 0)).toBe(true);
    }
  });

  it('are drawn, alike for the same seed and growing with the lead, while there is no past', () => {
    const spread = (lead: number): number =>
      Math.sqrt(draw(5).reduce((sum, t) => sum + t.outdoorC[lead - 1] ** 2, 0) / 400);
    expect(spread(1)).toBeLessThan(1.3);
    expect(spread(36)).toBeGreaterThan(2.4);
    expect(draw(5)[3].outdoorC).toEqual(draw(5)[3].outdoorC);
    expect(draw(5)[3].outdoorC).not.toEqual(draw(6)[3].outdoorC);
  });

  it('are drawn in opposite pairs, so that few of them have no mean of their own', () => {
    const drawn = drawTrajectories([], happened(0), FIRST, 36, 8, createRandom(5));
    for (let lead = 0; lead < 36; lead += 1) {
      expect(drawn.reduce((sum, t) => sum + t.outdoorC[lead], 0)).toBeCloseTo(0, 9);
      expect(drawn.reduce((sum, t) => sum + t.disturbanceW[lead], 0)).toBeCloseTo(0, 9);
    }
  });

  it('go on an hour later where they stood, but for the hour that has come', () => {
    const at = (hour: number) => drawTrajectories([], happened(0), hour, 36, 8, createRandom(5))[0].outdoorC;
    const [then, later] = [at(FIRST + 20), at(FIRST + 21)];
    // What is left of the first hour's shock fades by the draw's own persistence, 0.94 an hour.
    for (const lead of [2, 10, 30]) {
      expect(then[lead - 1] - later[lead - 2]).toBeCloseTo(then[0] * 0.94 ** (lead - 1), 9);
    }
  });

  it('are kept one every three hours for 30 days', () => {
    let kept: Issue[] = [];
    for (let hour = 0; hour < 60 * 24; hour += 1) kept = keepIssue(kept, issue(hour));
    expect(kept).toHaveLength(30 * 8);
  });
});

/** The line of one hour from its four quarters. */
function gathered(config: SiteConfig, quarters: readonly Partial<Observed>[]): HourLine | undefined {
  const gatherer = new HourGatherer(config);
  return quarters.flatMap((heard, i) => gatherer.add(record(MIDSUMMER_MS + (i + 1) * 900_000, heard))).at(-1);
}
const four = (heard: Partial<Observed>): Partial<Observed>[] => [heard, heard, heard, heard];

const minute = (count: number): number => MIDSUMMER_MS + count * 60_000;

describe('hours gathered from records', () => {
  const config = cabinSite();

  it('are means of what was heard, and null where it was less than half an hour', () => {
    const outdoors = [20, 22, 24, null].map((outdoorC, i) => ({ outdoorC, roomC: i === 0 ? 25 : null }));
    expect(gathered(config, outdoors)).toMatchObject({
      hour: FIRST,
      outdoorC: 22,
      roomC: null,
      panelW: null,
      dewC: null,
    });
  });

  it('count delivery as sensible and latent, and fans as heat', () => {
    const line = gathered(config, four({ roomC: 25, deliveredW: 1000, latentW: 200, fanPowerW: 40 }));
    expect(line).toMatchObject({ sensibleW: 800, latentW: 200, machineHeatW: -760 });
  });

  it('count the rests of a coil as no moisture taken, and an hour without a hygrometer as unknown', () => {
    const run = { roomC: 25, deliveredW: 1000, latentW: 200 };
    const rest = { roomC: 25, deliveredW: null, latentW: null };
    expect(gathered(config, [run, rest, run, rest])).toMatchObject({ sensibleW: 400, latentW: 100 });
    expect(gathered(config, [run, rest, rest, rest])).toMatchObject({ sensibleW: 200, latentW: 50 });
    const blind = { roomC: 25, deliveredW: 1000, latentW: null };
    expect(gathered(config, [blind, rest, blind, rest])).toMatchObject({ sensibleW: 500, latentW: null });
  });

  it('count a condenser in the cooled room as heat', () => {
    const inside = cabinSite({
      chiller: { 'ice-making': '0.2 kW', power: '0.1 kW', 'rejects-heat': 'cooled-room' },
    });
    expect(gathered(inside, four({ chargingW: 150, chillerPowerW: 100 }))?.machineHeatW).toBe(250);
  });

  it('do not take panels that a full battery may hold back for clouds', () => {
    const island = cabinSite({ power: { island: { panels: '2 kW', battery: { capacity: '5 kWh' } } } });
    expect(gathered(island, four({ panelPowerW: 200, batteryPct: 99 }))?.panelW).toBeNull();
    expect(gathered(island, four({ panelPowerW: 200, batteryPct: 60 }))?.panelW).toBe(200);
  });

  it('are finished by the record that ends them or by a later one, and pass over records out of order', () => {
    const gatherer = new HourGatherer(config);
    expect(gatherer.add(record(minute(50), { outdoorC: 20 }))).toEqual([]);
    expect(gatherer.add(record(minute(65), { outdoorC: 21 })).map((line) => line.hour)).toEqual([FIRST]);
    expect(gatherer.add(record(minute(30), { outdoorC: 90 }))).toEqual([]);
    expect(
      gatherer.add(record(minute(120), { outdoorC: 21 })).map((line) => [line.hour, line.outdoorC]),
    ).toEqual([[FIRST + 1, 21]]);
    expect(gatherer.add(record(minute(120), { outdoorC: 90 }))).toEqual([]);
  });
});
