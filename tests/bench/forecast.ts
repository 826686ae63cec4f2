/**
 * How good the forecast is, walking forward: at every third hour a forecast of 36 h is issued on what was seen by then,
 * and every hour of it in which somebody is home is held against what the truth cabin took. Baselines on the load itself:
 * yesterday repeats (the last known value of the hour), and the bins (the last 30 days' values of the hour, as an
 * ensemble). Panel power likewise on the measured array, hours of daylight.
 */
import { siteSchema, type SiteConfig } from '../../src/config.ts';
import { expectedHome } from '../../src/comfort-hours.ts';
import { ensembleQuantile } from '../../src/forecasting/ensemble.ts';
import { createForecaster, type Forecaster, type HubPoint } from '../../src/forecasting/forecaster.ts';
import type { Observed } from '../../src/forecasting/hours.ts';
import { coverage, crps, cvRmsePct, nmbePct } from '../../src/forecasting/scores.ts';
import { createRandom, type Random } from '../../src/numerics/random.ts';
import { clearSkyGhiWPerM2 } from '../../src/physics/sun.ts';
import { DAY_MS, HOUR_MS } from '../../src/time.ts';
import type { BenchOptions, BenchResult } from './bench.ts';
import { golden, greensboro, newark, type Place, type WeatherFile } from './forecast-data.ts';
import { QUARTER_MS, runTruth } from './forecast-truth.ts';

const ISSUE_MS = 3 * HOUR_MS;
const LEARN_DAYS = 30;
/** Scoring begins with June; the short run begins with July. */
const JUNE = 5;
/** Days of the runs with a hub. */
const FLOOR_DAYS = 45;

interface Pair {
  readonly lead: number;
  readonly members: Float64Array;
  readonly observed: number;
  readonly yesterday: number;
  readonly bins: readonly number[];
}

function siteAt(place: Place): SiteConfig {
  return siteSchema.parse({
    site: {
      id: 'bench',
      name: 'Bench cabin',
      zone: place.zone,
      latitude: `${place.latitudeDeg} deg`,
      longitude: `${place.longitudeDeg} deg`,
      elevation: `${place.elevationM} m`,
    },
    points: {},
    bank: { form: 'ice-on-coil-external', water: '240 L', 'most-ice': '150 kg' },
    chiller: { 'ice-making': '1.05 kW', power: '0.55 kW' },
    delivery: { flow: '12 L/min' },
    cabin: { floor: '52 m2', 'heat-loss': '110 W/K', 'heat-capacity': '3 kWh/K', 'solar-aperture': '3 m2' },
    comfort: { limit: '26 degC', 'sleeping-limit': '24 degC' },
    power: { tariff: { default: 0.2 } },
  });
}

const BLANK = {
  spanMs: QUARTER_MS,
  clock: 'set',
  chillerPowerW: null,
  batteryPct: null,
  chargingW: 0,
  dischargingW: 0,
} as const;

const recordAt = (startMs: number, heard: Omit<Observed, keyof typeof BLANK | 'atMs'>): Observed => ({
  ...BLANK,
  atMs: startMs + QUARTER_MS,
  ...heard,
});

const quantised = (value: number): number => Math.round(value / 0.0625) * 0.0625;

export interface Walk {
  readonly load: readonly Pair[];
  readonly outdoor: readonly Pair[];
  readonly days: number;
}

/**
 * What a hub says beside the own history. `known` gives the measured temperature itself: what is left is the error of
 * cabin, sun and people, the floor under any forecast. `made-up` is the measured temperature with a bias of 1.5 K and a
 * wandering error of about 1.5 K a day ahead; no real forecast of these days is at hand.
 */
type Hub = 'none' | 'known' | 'made-up';

function hubSays(hub: Hub, file: WeatherFile, nowMs: number, random: Random): HubPoint[] | null {
  if (hub === 'none') return null;
  const draw = random.fork(`hub ${nowMs}`);
  let offK = 0.5 * draw.normal();
  return Array.from({ length: 42 }, (_, i) => {
    const atMs = nowMs + (i - 2) * HOUR_MS;
    offK = 0.97 * offK + 0.4 * draw.normal();
    return { atMs, temperatureC: file.at(atMs).outdoorC + (hub === 'known' ? 0 : 1.5 + offK) };
  });
}

/** One walk through a file. */
export function walkFile(
  file: WeatherFile,
  random: Random,
  days: number,
  hub: Hub = 'none',
  month = JUNE,
): Walk {
  const config = siteAt(file.place);
  const scoreFrom = Date.UTC(file.year, month, 1, 6);
  const fromMs = scoreFrom - LEARN_DAYS * DAY_MS;
  const toMs = scoreFrom + days * DAY_MS;
  const truth = runTruth(config, (at) => file.at(at), fromMs - 5 * DAY_MS, toMs + 2 * DAY_MS, random).filter(
    (quarter) => quarter.startMs >= fromMs,
  );
  const loadByHour = hourly(truth.map((quarter) => quarter.deliveredW));
  const outdoorByHour = hourly(truth.map((quarter) => file.at(quarter.startMs + QUARTER_MS / 2).outdoorC));
  const noise = random.fork('probes');
  const forecaster = createForecaster(config, { seed: 1 });
  const load: Pair[] = [];
  const outdoor: Pair[] = [];
  for (const [i, quarter] of truth.entries()) {
    const nowMs = quarter.startMs;
    if (nowMs >= toMs) break;
    if (nowMs % ISSUE_MS === 0 && i > 0) {
      const forecast = forecaster.forecast(nowMs, hubSays(hub, file, nowMs, noise));
      if (nowMs >= scoreFrom) {
        const hour = i / 4;
        const perHour = HOUR_MS / forecast.slotMs;
        for (let lead = 1; lead <= 36; lead += 1) {
          const atMs = nowMs + (lead - 1) * HOUR_MS;
          const slot = (lead - 1) * perHour;
          const members = (pick: (s: (typeof forecast.scenarios)[number]) => Float64Array): Float64Array =>
            Float64Array.from(forecast.scenarios, (s) => meanOf(pick(s).subarray(slot, slot + perHour)));
          const pair = (values: Float64Array, byHour: readonly number[]): Pair => ({
            lead,
            members: values,
            observed: byHour[hour + lead - 1],
            ...baselines(byHour, hour, hour + lead - 1),
          });
          outdoor.push(
            pair(
              members((s) => s.outdoorC),
              outdoorByHour,
            ),
          );
          if (expectedHome(config.cabin, file.place.zone, atMs))
            load.push(
              pair(
                members((s) => s.loadW),
                loadByHour,
              ),
            );
        }
      }
    }
    const weather = file.at(nowMs + QUARTER_MS / 2);
    const heard = file.known(nowMs + QUARTER_MS / 2);
    const rhPct =
      100 *
      Math.exp(17.6 * (weather.dewC / (243 + weather.dewC) - weather.outdoorC / (243 + weather.outdoorC)));
    forecaster.observe(
      recordAt(nowMs, {
        outdoorC: heard ? quantised(weather.outdoorC + 0.1 * noise.normal()) : null,
        outdoorHumidityPct: heard ? Math.min(100, Math.max(1, rhPct + noise.normal())) : null,
        roomC: quantised(quarter.roomC + 0.05 * noise.normal()),
        roomHumidityPct: quarter.roomHumidityPct,
        panelPowerW: file.sunMeasured ? 1.1 * weather.sky.globalHorizontalWPerM2 : null,
        deliveredW: quarter.deliveredW * (1 + 0.03 * noise.normal()),
        latentW: quarter.latentW,
        fanPowerW: quarter.fanW,
        home: expectedHome(config.cabin, file.place.zone, nowMs),
      }),
    );
  }
  return { load, outdoor, days };
}

const meanOf = (values: ArrayLike<number>): number =>
  Array.from(values).reduce((sum, v) => sum + v, 0) / values.length;

function hourly(quarters: readonly number[]): number[] {
  return Array.from({ length: Math.floor(quarters.length / 4) }, (_, hour) =>
    meanOf(quarters.slice(hour * 4, hour * 4 + 4)),
  );
}

/** `now` and `target` are hours; nothing at or after `now` is known. */
function baselines(
  byHour: readonly number[],
  now: number,
  target: number,
): { yesterday: number; bins: number[] } {
  let back = target - 24;
  while (back >= now) back -= 24;
  const bins: number[] = [];
  for (let at = back; at >= 0 && bins.length < 30; at -= 24) bins.push(byHour[at]);
  return { yesterday: byHour[back], bins };
}

export function walkPanels(days: number): Pair[] | null {
  const data = golden();
  if (!data) return null;
  const config = siteAt(data.place);
  const byTime = new Map(data.lines.map((line) => [line.atMs, line]));
  const first = Math.ceil(data.lines[0].atMs / HOUR_MS) * HOUR_MS;
  const last = data.lines[data.lines.length - 1].atMs;
  const scoreFrom = Math.ceil((first + LEARN_DAYS * DAY_MS) / ISSUE_MS) * ISSUE_MS;
  const quarters: (number | null)[] = [];
  for (let at = first; at <= last; at += QUARTER_MS) quarters.push(byTime.get(at)?.powerW ?? null);
  const byHour = hourly(quarters.map((value, i) => value ?? quarters[i - 1] ?? 0));
  const forecaster = createForecaster(config, { seed: 1 });
  const pairs: Pair[] = [];
  let outdoorC: number | null = null;
  for (const [i] of quarters.entries()) {
    const nowMs = first + i * QUARTER_MS;
    if (nowMs % ISSUE_MS === 0 && i > 0)
      scorePanels(forecaster, nowMs, i / 4, scoreFrom, days, byHour, data.place, pairs);
    const line = byTime.get(nowMs);
    outdoorC = line?.outdoorC ?? outdoorC;
    forecaster.observe(
      recordAt(nowMs, {
        outdoorC: line ? outdoorC : null,
        outdoorHumidityPct: null,
        roomC: null,
        roomHumidityPct: null,
        panelPowerW: line?.powerW ?? null,
        deliveredW: null,
        latentW: null,
        fanPowerW: null,
        home: false,
      }),
    );
  }
  return pairs;
}

function scorePanels(
  forecaster: Forecaster,
  nowMs: number,
  hour: number,
  scoreFrom: number,
  days: number,
  byHour: readonly number[],
  place: Place,
  pairs: Pair[],
): void {
  const forecast = forecaster.forecast(nowMs, null);
  if (nowMs < scoreFrom || nowMs >= scoreFrom + days * DAY_MS) return;
  const perHour = HOUR_MS / forecast.slotMs;
  for (let lead = 1; lead <= 36 && hour + lead - 1 < byHour.length; lead += 1) {
    const atMs = nowMs + (lead - 0.5) * HOUR_MS;
    if (clearSkyGhiWPerM2(atMs, place.latitudeDeg, place.longitudeDeg, place.elevationM) < 20) continue;
    const slot = (lead - 1) * perHour;
    const members = Float64Array.from(forecast.scenarios, (s) =>
      meanOf(s.panelW.subarray(slot, slot + perHour)),
    );
    pairs.push({
      lead,
      members,
      observed: byHour[hour + lead - 1],
      ...baselines(byHour, hour, hour + lead - 1),
    });
  }
}

const baselineCvRmsePct = (pairs: readonly Pair[], forecast: (pair: Pair) => number): number =>
  cvRmsePct(
    pairs.map(forecast),
    pairs.map((pair) => pair.observed),
  ) ?? -1;

interface Score {
  readonly cvRmsePct: number;
  readonly nmbePct: number;
  readonly skillVsYesterdayPct: number;
  readonly skillVsBinsPct: number;
  readonly coverage80Pct: number;
  readonly crps: number;
}

export function scoreOf(pairs: readonly Pair[]): Score {
  const observed = pairs.map((pair) => pair.observed);
  const means = pairs.map((pair) => meanOf(pair.members));
  const mean = (score: (pair: Pair) => number): number => meanOf(pairs.map(score));
  const own = mean((pair) => crps(pair.members, pair.observed));
  const yesterday = mean((pair) => Math.abs(pair.yesterday - pair.observed));
  const bins = mean((pair) => crps(pair.bins, pair.observed));
  const inside = coverage(
    pairs.map((pair) => ensembleQuantile(pair.members, 0.1)),
    pairs.map((pair) => ensembleQuantile(pair.members, 0.9)),
    observed,
  );
  return {
    cvRmsePct: cvRmsePct(means, observed) ?? -1,
    nmbePct: nmbePct(means, observed) ?? -1,
    skillVsYesterdayPct: 100 * (1 - own / yesterday),
    skillVsBinsPct: 100 * (1 - own / bins),
    coverage80Pct: 100 * (inside ?? -1),
    crps: own,
  };
}

function rowOf(name: string, pairs: readonly Pair[]): (string | number)[] {
  const score = scoreOf(pairs);
  return [
    name,
    pairs.length,
    meanOf(pairs.map((pair) => pair.observed)),
    score.cvRmsePct,
    score.nmbePct,
    score.skillVsYesterdayPct,
    score.skillVsBinsPct,
    score.coverage80Pct,
  ];
}

export function run({ seed, quick }: BenchOptions): Promise<BenchResult> {
  const random = createRandom(seed);
  const files = [newark(), greensboro()].filter((file) => file !== null);
  const walks = files.map((file) => ({
    file,
    ...walkFile(file, random.fork(file.name), quick ? 10 : 100, 'none', quick ? JUNE + 1 : JUNE),
  }));
  const panels = walkPanels(quick ? 10 : 70);
  const rows: (string | number)[][] = [];
  for (const { file, load, outdoor } of walks) {
    rows.push(rowOf(`${file.name}: load, W`, load));
    for (const [from, to] of [
      [1, 6],
      [7, 12],
      [13, 24],
      [25, 36],
    ]) {
      rows.push(
        rowOf(
          `  lead ${from}-${to} h`,
          load.filter((pair) => pair.lead >= from && pair.lead <= to),
        ),
      );
    }
    rows.push(rowOf(`${file.name}: outdoor, °C`, outdoor));
  }
  const floors = quick
    ? []
    : files.map((file) => walkFile(file, random.fork(file.name), FLOOR_DAYS, 'known').load);
  const hubs = quick
    ? []
    : files.map((file) => walkFile(file, random.fork(file.name), FLOOR_DAYS, 'made-up').load);
  for (const [i, file] of files.entries()) {
    if (quick) break;
    rows.push(rowOf(`${file.name}: load, outdoor temperature known`, floors[i]));
    rows.push(rowOf(`${file.name}: load, made-up hub of 1.5 K`, hubs[i]));
  }
  if (panels) {
    rows.push(rowOf('Golden 2016: panels, W', panels));
    const half = panels.length >> 1;
    rows.push(rowOf('  first half', panels.slice(0, half)), rowOf('  second half', panels.slice(half)));
  }
  const all = walks.flatMap((walk) => walk.load);
  const total = all.length > 0 ? scoreOf(all) : null;
  const panelScore = panels && scoreOf(panels);
  const perFile = Object.fromEntries(
    walks.flatMap(({ file, load }) => {
      const score = scoreOf(load);
      const key = file.name.split(' ')[0].toLowerCase();
      return [
        [`${key}LoadCvRmsePct`, score.cvRmsePct],
        [`${key}LoadNmbePct`, score.nmbePct],
        [`${key}SkillVsYesterdayPct`, score.skillVsYesterdayPct],
        [`${key}SkillVsBinsPct`, score.skillVsBinsPct],
        [`${key}Coverage80Pct`, score.coverage80Pct],
      ];
    }),
  );
  const result: BenchResult = {
    title: 'Forecast of the load and of panel power, 36 h ahead, issued every 3 h on the past alone',
    budget:
      'CV-RMSE ≤ 25 %, |NMBE| ≤ 5 %, CRPS ≥ 30 % better than yesterday and ≥ 10 % than 30-day bins, 80 % covers 75–85 %',
    columns: [
      'what',
      'hours',
      'mean',
      'CV-RMSE %',
      'NMBE %',
      'vs yesterday %',
      'vs bins %',
      'in 80 % interval',
    ],
    rows,
    figures: {
      loadCvRmsePct: total?.cvRmsePct ?? 'no data',
      loadNmbePct: total?.nmbePct ?? 'no data',
      skillVsYesterdayPct: total?.skillVsYesterdayPct ?? 'no data',
      skillVsBinsPct: total?.skillVsBinsPct ?? 'no data',
      coverage80Pct: total?.coverage80Pct ?? 'no data',
      panelSkillVsYesterdayPct: panelScore?.skillVsYesterdayPct ?? 'no data',
      panelSkillVsBinsPct: panelScore?.skillVsBinsPct ?? 'no data',
      panelCoverage80Pct: panelScore?.coverage80Pct ?? 'no data',
      loadCvRmseTemperatureKnownPct:
        quick || floors.length === 0 ? 'not run' : scoreOf(floors.flat()).cvRmsePct,
      loadCvRmseMadeUpHubPct: quick || hubs.length === 0 ? 'not run' : scoreOf(hubs.flat()).cvRmsePct,
      yesterdayCvRmsePct: total ? baselineCvRmsePct(all, (pair) => pair.yesterday) : 'no data',
      binsCvRmsePct: total ? baselineCvRmsePct(all, (pair) => meanOf(pair.bins)) : 'no data',
      ...perFile,
      scoredDays: walks[0]?.days ?? 0,
    },
  };
  return Promise.resolve(result);
}
