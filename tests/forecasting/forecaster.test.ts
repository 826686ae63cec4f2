import { describe, expect, it } from 'vitest';
import { createForecaster, type Forecast, type Forecaster } from '../../src/forecasting/forecaster.ts';
import { knowsSentence } from '../../src/forecasting/knows.ts';
import { createRandom } from '../../src/numerics/random.ts';
import type { Observed } from '../../src/forecasting/hours.ts';
import { HOUR_MS } from '../../src/time.ts';
import { cabinSite, MIDSUMMER_MS, record } from './site.ts';

const config = cabinSite();
const mean = (values: ArrayLike<number>): number =>
  Array.from(values).reduce((sum, v) => sum + v, 0) / values.length;
const outdoorMean = (forecast: Forecast, slot: number): number =>
  mean(forecast.scenarios.map((s) => s.outdoorC[slot]));
const spread = (forecast: Forecast, slot: number): number => {
  const values = forecast.scenarios.map((s) => s.outdoorC[slot]);
  const middle = mean(values);
  return Math.sqrt(mean(values.map((v) => (v - middle) ** 2)));
};

/** Weather of day n: a wave of 8 K round a mean that wanders with this spread. */
function weatherOf(seed: number, sd: number): (atMs: number) => number {
  const random = createRandom(seed);
  const offsets: number[] = [0];
  for (let day = 1; day < 80; day += 1) offsets.push(0.5 * offsets[day - 1] + sd * random.normal());
  return (atMs) => {
    const days = (atMs - MIDSUMMER_MS) / 86_400_000;
    return 24 + (offsets[Math.floor(days)] ?? 0) + 8 * Math.sin((days - 9 / 24) * 2 * Math.PI);
  };
}

function live(
  forecaster: Forecaster,
  days: number,
  outdoorC: (atMs: number) => number,
  more: Partial<Observed> = {},
): number {
  let nowMs = MIDSUMMER_MS;
  for (; nowMs < MIDSUMMER_MS + days * 24 * HOUR_MS;) {
    nowMs += HOUR_MS / 2;
    forecaster.observe(
      record(nowMs, {
        spanMs: HOUR_MS / 2,
        outdoorC: outdoorC(nowMs),
        roomC: 25,
        home: true,
        deliveredW: 600,
        latentW: 0,
        ...more,
      }),
    );
    if (nowMs % (6 * HOUR_MS) === 0) forecaster.forecast(nowMs, null);
  }
  return nowMs;
}

describe('on the first day', () => {
  const nowMs = Date.parse('2026-07-01T15:00:00Z');
  const first = createForecaster(config, { seed: 1 });
  first.observe(record(nowMs, { outdoorC: 33, roomC: 27, home: true }));
  const forecast = first.forecast(nowMs, null);

  it('has a value for every slot of the horizon in every scenario', () => {
    expect(forecast.scenarios).toHaveLength(config.planning.scenarios);
    expect(forecast).toMatchObject({ madeMs: nowMs, startMs: nowMs, slotMs: 900_000 });
    for (const scenario of forecast.scenarios) {
      for (const values of [
        scenario.outdoorC,
        scenario.sunWPerM2,
        scenario.loadW,
        scenario.latentW,
        scenario.panelW,
      ]) {
        expect(values).toHaveLength(144);
        expect(values.every(Number.isFinite)).toBe(true);
      }
      for (const watts of scenario.loadW) expect(watts).toBeGreaterThanOrEqual(0);
      expect(Number.isFinite(scenario.warmKhPerKwh)).toBe(true);
    }
    expect(forecast.scenarios.reduce((sum, scenario) => sum + scenario.weight, 0)).toBeCloseTo(1, 12);
  });

  it('stands on the design day moved to the reading, and says so', () => {
    expect(outdoorMean(forecast, 0)).toBeCloseTo(33, 0);
    // design range 16 K, coolest at dawn
    const night = Array.from({ length: 40 }, (_, i) => outdoorMean(forecast, 30 + i));
    expect(33 - Math.min(...night)).toBeGreaterThan(9);
    expect(forecast.knows).toBe(
      "Rests on the site's design day, moved to the readings so far and the cabin as the site file describes it; sun judged by the daily range of temperature.",
    );
  });

  it('expects a load this evening, and more in the worst tenth', () => {
    expect(forecast.eveningLoadKwh).toBeGreaterThan(2);
    expect(forecast.eveningLoadHighKwh).toBeGreaterThan(forecast.eveningLoadKwh);
    expect(forecast.eveningLoadHighKwh).toBeLessThan(60);
  });

  it('works with nothing heard at all', () => {
    const blind = createForecaster(config, { seed: 1 }).forecast(nowMs, null);
    expect(blind.scenarios.every((s) => s.loadW.every(Number.isFinite))).toBe(true);
  });
});

describe('with weeks of history', () => {
  const outdoor = weatherOf(5, 0.3);
  const steady = createForecaster(config, { seed: 1 });
  const nowMs = live(steady, 25, outdoor);
  const forecast = steady.forecast(nowMs, null);

  it('knows the daily course of this site and how steady its weather is', () => {
    for (const slot of [10, 50, 90, 130]) {
      expect(Math.abs(outdoorMean(forecast, slot) - outdoor(nowMs + slot * 900_000))).toBeLessThan(1.5);
    }
    const blank = createForecaster(config, { seed: 1 }).forecast(nowMs, null);
    expect(spread(forecast, 100)).toBeLessThan(0.6 * spread(blank, 100));
    expect(forecast.knows).toMatch(/^Rests on 2[45] days of its own weather \(30 make it good\)/);
  });

  it('goes on where it stood when it is given its memory', () => {
    const memory: unknown = JSON.parse(JSON.stringify(steady.memory()));
    const again = createForecaster(config, { seed: 1, memory });
    again.observe(
      record(nowMs, { outdoorC: outdoor(nowMs), roomC: 25, home: true, deliveredW: 600, latentW: 0 }),
    );
    steady.observe(
      record(nowMs, { outdoorC: outdoor(nowMs), roomC: 25, home: true, deliveredW: 600, latentW: 0 }),
    );
    const [a, b] = [steady.forecast(nowMs, null), again.forecast(nowMs, null)];
    expect(Math.abs(a.eveningLoadKwh - b.eveningLoadKwh)).toBeLessThan(0.02 * a.eveningLoadKwh + 0.05);
    for (const slot of [0, 40, 120])
      expect(Math.abs(outdoorMean(a, slot) - outdoorMean(b, slot))).toBeLessThan(0.1);
  });

  it('says the same twice and something else for another seed', () => {
    const twin = createForecaster(config, { seed: 1 });
    const other = createForecaster(config, { seed: 2 });
    for (const forecaster of [twin, other]) live(forecaster, 2, outdoor);
    const at = MIDSUMMER_MS + 48 * HOUR_MS;
    expect(twin.forecast(at, null)).toEqual(twin.forecast(at, null));
    expect(twin.forecast(at, null).scenarios[3].outdoorC).not.toEqual(
      other.forecast(at, null).scenarios[3].outdoorC,
    );
  });

  it.each([undefined, null, 7, 'x', {}, { form: 99 }, { form: 1, hours: 3, issues: [], cabin: null }])(
    'begins afresh on a memory that is none: %j',
    (memory) =>
      expect(
        createForecaster(config, { seed: 1, memory }).forecast(nowMs, null).scenarios.length,
      ).toBeGreaterThan(0),
  );
});

describe('a hub', () => {
  it('is corrected for its bias and named', () => {
    const outdoor = weatherOf(8, 3);
    const forecaster = createForecaster(config, { seed: 1 });
    const hub = (nowMs: number) =>
      Array.from({ length: 50 }, (_, i) => ({
        atMs: nowMs + (i - 2) * HOUR_MS,
        temperatureC: outdoor(nowMs + (i - 2) * HOUR_MS) - 2.5,
      }));
    let nowMs = MIDSUMMER_MS;
    while (nowMs < MIDSUMMER_MS + 20 * 24 * HOUR_MS) {
      nowMs += HOUR_MS / 2;
      forecaster.observe(record(nowMs, { spanMs: HOUR_MS / 2, outdoorC: outdoor(nowMs) }));
      if (nowMs % (3 * HOUR_MS) === 0) forecaster.forecast(nowMs, hub(nowMs));
    }
    const forecast = forecaster.forecast(nowMs, hub(nowMs));
    for (const slot of [20, 60, 100]) {
      expect(Math.abs(outdoorMean(forecast, slot) - outdoor(nowMs + (slot + 0.5) * 900_000))).toBeLessThan(1);
    }
    expect(forecast.knows).toMatch(/a hub's forecast \(usually \d\.\d K off a day ahead, weighs \d+ %\)/);
  });
});

describe('outdoor humidity', () => {
  it('becomes moisture for the coil: the same heat costs more under moist air', () => {
    const latentKwh = (outdoorHumidityPct: number): number => {
      const forecaster = createForecaster(config, { seed: 1 });
      const nowMs = live(forecaster, 3, weatherOf(6, 1), { outdoorHumidityPct, roomHumidityPct: 50 });
      const { scenarios, slotMs } = forecaster.forecast(nowMs, null);
      return (mean(scenarios.map((s) => mean(s.latentW) * s.latentW.length)) * slotMs) / HOUR_MS / 1000;
    };
    const [dry, moist] = [latentKwh(20), latentKwh(75)];
    expect(moist).toBeGreaterThan(1.2 * dry);
  });
});

describe('robustness', () => {
  it('learns nothing while the clock is doubtful', () => {
    const forecaster = createForecaster(config, { seed: 1 });
    live(forecaster, 2, () => 20, { clock: 'doubtful' });
    expect(forecaster.forecast(MIDSUMMER_MS + 48 * HOUR_MS, null).knows).toMatch(/design day/);
  });

  it('bridges days without a record', () => {
    const forecaster = createForecaster(config, { seed: 1 });
    const nowMs = live(forecaster, 6, weatherOf(2, 1)) + 5 * 24 * HOUR_MS;
    const forecast = forecaster.forecast(nowMs, null);
    expect(forecast.scenarios.every((s) => s.outdoorC.every(Number.isFinite))).toBe(true);
    expect(Math.abs(outdoorMean(forecast, 40) - 24)).toBeLessThan(14);
  });

  it('keeps its slots of equal length over a change of clocks', () => {
    for (const at of ['2026-03-28T18:00:00Z', '2026-10-24T18:00:00Z']) {
      const forecast = createForecaster(config, { seed: 1 }).forecast(Date.parse(at), null);
      expect(forecast.scenarios[0].outdoorC).toHaveLength(144);
    }
  });

  it('counts the evening to noon, and from nine on the night to come', () => {
    const forecaster = createForecaster(config, { seed: 1 });
    const load = (at: string): number => {
      forecaster.observe(record(Date.parse(at), { outdoorC: 30, roomC: 27, home: true }));
      return forecaster.forecast(Date.parse(at), null).eveningLoadKwh;
    };
    expect(load('2026-07-02T06:30:00Z')).toBeLessThan(load('2026-07-02T07:15:00Z') / 2);
  });

  it('has panels in the scenarios of an island and none without', () => {
    const island = cabinSite({ power: { island: { panels: '2.4 kW' } } });
    const noonMs = Date.parse('2026-07-01T11:00:00Z');
    const sunny = createForecaster(island, { seed: 1 }).forecast(noonMs, null);
    const watts = mean(sunny.scenarios.map((s) => s.panelW[4]));
    expect(watts).toBeGreaterThan(800);
    expect(watts).toBeLessThan(2400);
    expect(
      createForecaster(config, { seed: 1 })
        .forecast(noonMs, null)
        .scenarios[0].panelW.every((w) => w === 0),
    ).toBe(true);
  });
});

it('words what it knows for people', () => {
  const base = { weatherDays: 34.5, hub: null, cabinDays: 12, refusedDays: 1, sun: 'panels' } as const;
  expect(knowsSentence(base)).toBe(
    'Rests on 34 days of its own weather and 12 days of how the cabin answers, 1 day with open windows left out; sun judged by panel power.',
  );
  expect(
    knowsSentence({ ...base, weatherDays: 3, cabinDays: 0, hub: { sdK: 1.6, issues: 12, weight: 0.7 } }),
  ).toBe(
    "Rests on 3 days of its own weather (30 make it good), a hub's forecast (usually 1.6 K off a day ahead, weighs 70 %) and the cabin as the site file describes it; sun judged by panel power.",
  );
});
