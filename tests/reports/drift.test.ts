import { describe, expect, it } from 'vitest';
import { firstChange, LEAST_NIGHTS, scan } from '../../src/reports/change-point.ts';
import { driftOf, type Signature } from '../../src/reports/drift.ts';
import { createRandom } from '../../src/numerics/random.ts';
import { driftingSheets, type DriftStory, type Noises } from './drift-story.ts';

const OPTIONS = { leastNoise: 0.01, leastStep: 0.05, hazardPerNight: 1 / 365 };

describe('a change in one series', () => {
  it('is found where it is, in size, without noise', () => {
    const series = Array.from({ length: 30 }, (_, i) => ({ value: i < 20 ? 1 : 1.2, weather: [] }));
    const found = scan(series, OPTIONS);
    expect(found).toMatchObject({ at: 20, earliest: 20, latest: 20 });
    expect(found?.step).toBeCloseTo(0.2, 12);
    expect(found?.confidence).toBeGreaterThan(0.99);
  });

  it('is not seen in the weather, however warm the second half', () => {
    const random = createRandom(3);
    const series = Array.from({ length: 40 }, (_, i) => {
      const weather = (i < 20 ? 20 : 27) + 2 * random.normal();
      return { value: 0.02 * weather + 0.01 * random.normal(), weather: [weather] };
    });
    expect(firstChange(series, OPTIONS)).toBeNull();
    expect(
      firstChange(
        series.map(({ value }) => ({ value, weather: [] })),
        OPTIONS,
      ),
    ).not.toBeNull();
  });

  it('is seen through the weather', () => {
    const random = createRandom(4);
    const series = Array.from({ length: 40 }, (_, i) => {
      const weather = 24 + 3 * random.normal();
      return { value: 0.02 * weather + (i < 28 ? 0 : 0.15) + 0.02 * random.normal(), weather: [weather] };
    });
    const found = firstChange(series, OPTIONS);
    expect(found?.change.step).toBeCloseTo(0.15, 1);
    expect(Math.abs((found?.change.at ?? 0) - 28)).toBeLessThanOrEqual(1);
  });

  it('is not made of one or two wild nights', () => {
    const series = Array.from({ length: 40 }, (_, i) => ({
      value: i === 30 || i === 33 ? 3 : 1 + 0.01 * (i % 3),
      weather: [],
    }));
    expect(firstChange(series, OPTIONS)).toBeNull();
  });

  it('needs enough nights, and says so by silence', () => {
    expect(
      scan(
        Array.from({ length: LEAST_NIGHTS - 1 }, (_, i) => ({ value: i < 5 ? 1 : 9, weather: [] })),
        OPTIONS,
      ),
    ).toBeNull();
  });
});

/** Quiet nights, for the logic alone; what a plant's own noise allows is what the benchmark measures. */
const QUIET: Noises = {
  leak: { sd: 0.05, rho: 0.2 },
  'machine-power': { sd: 0.015, rho: 0.2 },
  coolant: { sd: 0.02, rho: 0.2 },
  coil: { sd: 0.03, rho: 0.2 },
  flow: { sd: 0.02, rho: 0.2 },
  'pump-power': { sd: 0.01, rho: 0.2 },
  airing: { sd: 0.01, rho: 0.2 },
  'probe bank-bottom': { sd: 0.05, rho: 0.2 },
  'probe coolant-supply': { sd: 0.02, rho: 0.2 },
};

const story = (by: NonNullable<DriftStory['change']>['by'], seed = 5): DriftStory => ({
  nights: 75,
  seed,
  noise: QUIET,
  change: { atNight: 60, by },
});

const UP = Math.log(1.15);
const DOWN = Math.log(0.85);

describe('signatures', () => {
  it.each<[Signature, NonNullable<DriftStory['change']>['by']]>([
    ['wet-insulation', { leak: Math.log(1.5) }],
    ['dirty-condenser', { 'machine-power': UP }],
    ['low-refrigerant', { coolant: DOWN }],
    ['low-refrigerant', { coolant: DOWN, leak: 2 * UP }],
    ['fouled-coil', { coil: DOWN }],
    ['tired-pump', { flow: DOWN, coil: -DOWN }],
    ['lying-probe', { 'probe bank-bottom': 0.5 }],
    ['lying-probe', { 'probe coolant-supply': 0.8, coolant: DOWN }],
    ['wet-insulation', { leak: Math.log(2), 'probe bank-bottom': 0.4 }],
    ['open-door-habit', { airing: 0.3 }],
  ])('%s is named alone, with its night', (signature, by) => {
    const sheets = driftingSheets(story(by));
    const found = driftOf(sheets);
    expect(found.map((one) => one.signature)).toEqual([signature]);
    const [one] = found;
    const at = sheets.findIndex((sheet) => sheet.night.date === one.since);
    expect(Math.abs(at - 60)).toBeLessThanOrEqual(2);
    expect(one.sinceEarliest <= one.since && one.since <= one.sinceLatest).toBe(true);
    expect(one.toldOn > one.since).toBe(true);
    expect(one.confidence).toBeGreaterThan(0.99);
    expect(one.sentence).toContain(one.since);
  });

  it('say what to look at, each in a sentence, and never to replace anything', () => {
    const found = driftOf(
      driftingSheets(story({ coil: DOWN, airing: 0.3, coolant: DOWN, 'probe bank-bottom': -0.6 })),
    );
    expect(found.length).toBeGreaterThanOrEqual(4);
    for (const one of found) expect(one.look).toMatch(/^(Look at|Have a certified person look at) .*\.$/);
    expect(JSON.stringify(found)).not.toMatch(/replac/i);
  });

  it('speaks in the units of the site', () => {
    const sheets = driftingSheets(story({ 'probe bank-bottom': 0.5 }));
    const inPounds = sheets.map((sheet) => ({ ...sheet, site: { ...sheet.site, units: 'IP' as const } }));
    expect(driftOf(sheets)[0].sentence).toMatch(/^Bank-bottom beside ice up 0\.5 K since/);
    expect(driftOf(inPounds)[0].sentence).toMatch(/^Bank-bottom beside ice up 0\.9 °F since/);
    expect(driftOf(inPounds)[0]).toMatchObject({ unit: 'K', change: driftOf(sheets)[0].change });
  });

  it('tells a repair as a change that is no trouble, after the trouble', () => {
    const sheets = driftingSheets({
      ...story({ leak: Math.log(1.6) }),
      nights: 60,
      change: { atNight: 30, by: { leak: Math.log(1.6) } },
    });
    const healed = driftingSheets({ ...story({}), nights: 110, seed: 5 }).slice(60);
    const found = driftOf([...sheets, ...healed]);
    expect(found.map((one) => one.signature)).toEqual(['wet-insulation', null]);
  });

  it('says nothing on quiet nights, on few nights, on none', () => {
    for (const seed of [1, 2, 3]) {
      expect(driftOf(driftingSheets({ nights: 120, seed, noise: QUIET }))).toEqual([]);
    }
    expect(driftOf(driftingSheets({ nights: 9, seed: 1, noise: QUIET }))).toEqual([]);
    expect(driftOf([])).toEqual([]);
  });

  it('leaves out nights that were hardly seen', () => {
    const sheets = driftingSheets(story({ coil: DOWN })).map((sheet, i) =>
      i >= 60 ? { ...sheet, coveredPct: 50 } : sheet,
    );
    expect(driftOf(sheets)).toEqual([]);
  });
});
