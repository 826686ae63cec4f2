/**
 * What planning is worth: the plan against itself with foresight and against the simple strategies, night after night
 * in the truth plant. The plan knows only what it would in life: it estimates the ice from faulty probes, forecasts
 * from what it has seen, and learns on the way. The others are told the true ice and foresee the plan's own mean;
 * foresight is told the weather and the load that will be.
 *
 * Ice (and battery) left at the end counts for everybody at the cheapest it can be made for.
 */
import { quantile } from '../../src/numerics/quantile.ts';
import { extraterrestrialWPerM2, planeOfArray, splitGlobal, sunPosition } from '../../src/physics/sun.ts';
import { solvePlan } from '../../src/planning/plan.ts';
import type { PlanProblem } from '../../src/planning/problem.ts';
import { seededWeather } from '../../src/simulator/seeded-weather.ts';
import type { WeatherSource } from '../../src/simulator/weather.ts';
import { DAY_MS, fromWall } from '../../src/time.ts';
import { milpGaps } from '../planning/milp-gap.ts';
import type { BenchOptions, BenchResult } from './bench.ts';
import { planCases, type PlanCase } from './plan-cases.ts';
import {
  foresee,
  foresightDecider,
  idleDecider,
  plannedDecider,
  simpleDecider,
  type MeanForecasts,
} from './plan-deciders.ts';
import { runLoop, type LoopOptions, type Outcome } from './plan-loop.ts';

const RUNS = ['foresight', 'planned', 'storage-priority', 'chiller-priority', 'timetable'] as const;
type Run = (typeof RUNS)[number];

interface CaseResult {
  readonly on: PlanCase;
  readonly nights: number;
  readonly runs: Readonly<Record<Run, Outcome>>;
  readonly money: Readonly<Record<Run, number>>;
  readonly solveMs: readonly number[];
}

export async function run({ seed, quick }: BenchOptions): Promise<BenchResult> {
  const nights = quick ? 2 : 60;
  const results = planCases(seed).map((on, k) => runCase(on, seed * 100 + k, nights, quick ? 2 : 14));
  const gaps = await milpGaps(seed, quick ? 5 : 50);
  const lpGapPct = gaps.reduce((sum, gap) => sum + gap.gapPct, 0) / gaps.length;
  return {
    title: `Plan: ${nights} nights × ${results.length} cases in the truth plant`,
    budget:
      'cost at most 3 % over foresight, no simple strategy cheaper at as few warm hours; published spread: storage priority about 6 %, chiller priority up to 20 % over optimum (Drees & Braun 1996); solve at most 25 ms; gap to HiGHS at most 1 %',
    columns: [
      'case',
      'strategy',
      'money',
      'over foresight %',
      'warm K h/night',
      'all-in',
      'starts/night',
      'ice left kWh',
    ],
    rows: results.flatMap((result) => RUNS.map((name) => rowOf(result, name))),
    figures: {
      ...figuresOf(results),
      solveMsMedian: quantile(
        results.flatMap((result) => result.solveMs),
        0.5,
      ),
      lpGapPct,
      lpGapWorstPct: Math.max(...gaps.map((gap) => gap.gapPct)),
      nights: nights * results.length,
    },
  };
}

function runCase(on: PlanCase, seed: number, nights: number, warmUpDays: number): CaseResult {
  const { site } = on.config;
  const countFromMs = fromWall(site.zone, 2026, 7, 1, 12 * 60);
  const endMs = countFromMs + nights * DAY_MS;
  const { designDayC, designRangeK } = on.config.cabin;
  const weather = seededWeather({ seed, ...site, hotDayC: designDayC ?? 34, rangeK: designRangeK });
  const options: LoopOptions = {
    on,
    seed,
    weather,
    startMs: countFromMs - warmUpDays * DAY_MS,
    countFromMs,
    endMs,
    reachMs: endMs,
  };
  const means: MeanForecasts = new Map();
  const problems: PlanProblem[] = [];
  const planned = runLoop(options, plannedDecider(options, seed, means, problems));
  const storage = runLoop(
    { ...options, reachMs: endMs + 2 * DAY_MS },
    simpleDecider(options, means, 'storage-priority'),
  );
  const warm = [...means.values()].map((f) => f.scenarios[0].warmKhPerKwh).filter((x) => x > 0);
  const will = foresee(
    storage.quarters,
    options.startMs,
    panelPower(on, weather),
    quantile(warm, 0.5),
    on.config,
  );
  const runs = {
    planned,
    'storage-priority': storage,
    foresight: runLoop(options, foresightDecider(options, means, will)),
    'chiller-priority': runLoop(options, simpleDecider(options, means, 'chiller-priority')),
    timetable: runLoop(options, simpleDecider(options, means, 'timetable')),
  };
  const houseMoney = on.config.power.island ? runLoop(options, idleDecider(options, means)) : null;
  const money = Object.fromEntries(
    RUNS.map((name) => [name, adjusted(on, runs[name]) - (houseMoney ? adjusted(on, houseMoney) : 0)]),
  ) as Record<Run, number>;
  return { on, nights, runs, money, solveMs: timed(problems) };
}

/** Money less what is left in the bank and battery, at the cheapest it can be had for. */
function adjusted(on: PlanCase, outcome: Outcome): number {
  const { power, chiller } = on.config;
  const wear = power.island?.battery?.wear ?? 0;
  const prices = power.tariff
    ? [power.tariff.default, ...power.tariff.periods.map((period) => period.price)]
    : [wear];
  const perIce = chiller.powerW / chiller.iceMakingW;
  return outcome.money - Math.min(...prices) * perIce * outcome.iceLeftKwh - wear * outcome.batteryLeftKwh;
}

/** Times some of the very problems that came up, each solved twice and the second one counted. */
function timed(problems: readonly PlanProblem[]): number[] {
  const fallBack = (note: string): never => {
    throw new Error(note);
  };
  return problems
    .filter((_, k) => k % 24 === 7)
    .map((problem) => {
      solvePlan(problem, { fallBack });
      const begunMs = performance.now();
      solvePlan(problem, { fallBack });
      return performance.now() - begunMs;
    });
}

/** What the panels could give, curtailed or not, by the truth plant's own figures. */
function panelPower(on: PlanCase, weather: WeatherSource): (atMs: number) => number {
  const { site, power } = on.config;
  const { island } = power;
  if (!island) return () => 0;
  const plane = { tiltDeg: island.panelTiltDeg, azimuthDeg: island.panelAzimuthDeg };
  return (atMs) => {
    const { ghiWPerM2, outdoorC } = weather.at(atMs);
    if (!(ghiWPerM2 > 0)) return 0;
    const sun = sunPosition(atMs, site.latitudeDeg, site.longitudeDeg);
    const planeW = planeOfArray(
      sun,
      splitGlobal(ghiWPerM2, sun.elevationDeg, extraterrestrialWPerM2(atMs)),
      plane,
    );
    const cellC = outdoorC + 0.028 * planeW;
    return Math.max(0, island.panelsW * (planeW / 1000) * 0.86 * (1 - 0.004 * (cellC - 25)));
  };
}

const overPct = (result: CaseResult, name: Run): number =>
  100 * (result.money[name] / result.money.foresight - 1);

function rowOf(result: CaseResult, name: Run): (string | number)[] {
  const outcome = result.runs[name];
  const warm = outcome.warmKh / result.nights;
  const price = result.on.config.comfort.warmHourPrice;
  return [
    result.on.name,
    name,
    result.money[name].toFixed(2),
    overPct(result, name).toFixed(1),
    warm.toFixed(2),
    (result.money[name] + price * outcome.warmKh).toFixed(2),
    (outcome.starts / result.nights).toFixed(1),
    outcome.iceLeftKwh.toFixed(1),
  ];
}

/** Money over all cases together; warm hours as means over the cases. */
function figuresOf(results: readonly CaseResult[]): Record<string, number> {
  const total = (name: Run): number => results.reduce((sum, r) => sum + r.money[name], 0);
  const over = (name: Run): number => 100 * (total(name) / total('foresight') - 1);
  const warm = (name: Run): number =>
    results.reduce((sum, r) => sum + r.runs[name].warmKh / r.nights, 0) / results.length;
  return {
    costOverForesightPct: over('planned'),
    storagePriorityOverForesightPct: over('storage-priority'),
    chillerPriorityOverForesightPct: over('chiller-priority'),
    timetableOverForesightPct: over('timetable'),
    warmHoursPerNight: warm('planned'),
    foresightWarmHoursPerNight: warm('foresight'),
    storagePriorityWarmHoursPerNight: warm('storage-priority'),
    chillerPriorityWarmHoursPerNight: warm('chiller-priority'),
    timetableWarmHoursPerNight: warm('timetable'),
  };
}
