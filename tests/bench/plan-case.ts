/** One case of the plan benchmark: every strategy on the same weather, and what it came to. */
import { quantile } from '../../src/numerics/quantile.ts';
import { extraterrestrialWPerM2, planeOfArray, splitGlobal, sunPosition } from '../../src/physics/sun.ts';
import { solvePlan } from '../../src/planning/plan.ts';
import type { PlanProblem } from '../../src/planning/problem.ts';
import { seededWeather } from '../../src/simulator/seeded-weather.ts';
import type { WeatherSource } from '../../src/simulator/weather.ts';
import { DAY_MS, fromWall } from '../../src/time.ts';
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

export const RUNS = [
  'foresight',
  'planned',
  'planned, true ice',
  'storage-priority',
  'chiller-priority',
  'timetable',
] as const;
export type Run = (typeof RUNS)[number];

/** Days that those who learn nothing live before they count: bank, battery and cabin forget how they began. */
const SETTLING_DAYS = 2;

/** Which case of which seed, and how long. */
export interface CaseOrder {
  readonly seed: number;
  readonly index: number;
  readonly nights: number;
  /** Days that the plan learns before it counts; at least as many as the others settle. */
  readonly warmUpDays: number;
}

/** Plain values only: it comes from another process. */
export interface CaseResult {
  readonly name: string;
  readonly nights: number;
  readonly warmHourPrice: number;
  readonly runs: Readonly<Record<Run, Pick<Outcome, 'warmKh' | 'starts' | 'iceLeftKwh'>>>;
  readonly money: Readonly<Record<Run, number>>;
  readonly solveMs: readonly number[];
}

export function runCase({ seed: baseSeed, index, nights, warmUpDays }: CaseOrder): CaseResult {
  const on = planCases(baseSeed)[index];
  const seed = baseSeed * 100 + index;
  const { site } = on.config;
  const countFromMs = fromWall(site.zone, 2026, 7, 1, 12 * 60);
  const endMs = countFromMs + nights * DAY_MS;
  const { designDayC, designRangeK } = on.config.cabin;
  const weather = seededWeather({ seed, ...site, hotDayC: designDayC ?? 34, rangeK: designRangeK });
  const options: LoopOptions = {
    on,
    seed,
    weather,
    startMs: countFromMs - SETTLING_DAYS * DAY_MS,
    countFromMs,
    endMs,
    reachMs: endMs,
  };
  const learning = { ...options, startMs: countFromMs - warmUpDays * DAY_MS };
  const means: MeanForecasts = new Map();
  const problems: PlanProblem[] = [];
  const kept = { means, problems };
  const planned = runLoop(learning, plannedDecider(learning, seed, kept, false));
  const told = runLoop(learning, plannedDecider(learning, seed, { means: new Map(), problems: [] }, true));
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
    'planned, true ice': told,
    'storage-priority': storage,
    foresight: runLoop(options, foresightDecider(options, means, will)),
    'chiller-priority': runLoop(options, simpleDecider(options, means, 'chiller-priority')),
    timetable: runLoop(options, simpleDecider(options, means, 'timetable')),
  };
  const houseMoney = on.config.power.island ? runLoop(options, idleDecider(options, means)) : null;
  const money = Object.fromEntries(
    RUNS.map((name) => [name, adjusted(on, runs[name]) - (houseMoney ? adjusted(on, houseMoney) : 0)]),
  ) as Record<Run, number>;
  const { warmHourPrice } = on.config.comfort;
  return { name: on.name, nights, warmHourPrice, runs: bare(runs), money, solveMs: timed(problems) };
}

function bare(runs: Readonly<Record<Run, Outcome>>): CaseResult['runs'] {
  const plain = ({ warmKh, starts, iceLeftKwh }: Outcome) => ({ warmKh, starts, iceLeftKwh });
  return Object.fromEntries(RUNS.map((name) => [name, plain(runs[name])])) as CaseResult['runs'];
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
