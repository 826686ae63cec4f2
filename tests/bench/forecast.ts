/**
 * How good the forecast is, walking forward: at every third hour a forecast of 36 h is issued on what was seen by then,
 * and every hour of it in which somebody is home is held against what the truth cabin took. Baselines on the load itself:
 * yesterday repeats (the last known value of the hour), and the bins (the last 30 days' values of the hour, as an
 * ensemble). Panel power likewise on the measured array, hours of daylight.
 */
import { expectedHome } from '../../src/comfort-hours.ts';
import { createForecaster } from '../../src/forecasting/forecaster.ts';
import { createRandom, type Random } from '../../src/numerics/random.ts';
import { DAY_MS, HOUR_MS } from '../../src/time.ts';
import type { BenchOptions, BenchResult } from './bench.ts';
import { greensboro, newark, type WeatherFile } from './forecast-data.ts';
import { hubSays, type Hub } from './forecast-hub.ts';
import { walkPanels } from './forecast-panels.ts';
import { baselineCvRmsePct, baselines, hourly, meanOf, rowOf, scoreOf, type Pair } from './forecast-score.ts';
import { quantised, recordAt, siteAt } from './forecast-site.ts';
import { QUARTER_MS, runTruth } from './forecast-truth.ts';

const ISSUE_MS = 3 * HOUR_MS;
const LEARN_DAYS = 30;
/** Scoring begins with June; the short run begins with July. */
const JUNE = 5;
/** Days of the runs with a hub. */
const FLOOR_DAYS = 45;

export interface Walk {
  readonly load: readonly Pair[];
  readonly outdoor: readonly Pair[];
  readonly days: number;
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
  const beside = (hub: Hub): (readonly Pair[])[] =>
    quick ? [] : files.map((file) => walkFile(file, random.fork(file.name), FLOOR_DAYS, hub).load);
  const floors = beside('known');
  const means = beside('mean-known');
  const hubs = beside('made-up');
  for (const [i, file] of files.entries()) {
    if (quick) break;
    rows.push(rowOf(`${file.name}: load, outdoor temperature known`, floors[i]));
    rows.push(rowOf(`${file.name}: load, daily means of it known`, means[i]));
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
      loadCvRmseDailyMeanKnownPct: quick || means.length === 0 ? 'not run' : scoreOf(means.flat()).cvRmsePct,
      loadCvRmseMadeUpHubPct: quick || hubs.length === 0 ? 'not run' : scoreOf(hubs.flat()).cvRmsePct,
      yesterdayCvRmsePct: total ? baselineCvRmsePct(all, (pair) => pair.yesterday) : 'no data',
      binsCvRmsePct: total ? baselineCvRmsePct(all, (pair) => meanOf(pair.bins)) : 'no data',
      ...perFile,
      scoredDays: walks[0]?.days ?? 0,
    },
  };
  return Promise.resolve(result);
}
