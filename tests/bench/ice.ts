/**
 * `bench ice`: how far the estimate is from the truth of a simulated plant, whether its interval is honest, and what
 * bookkeeping alone makes of the same data.
 */
import { performance } from 'node:perf_hooks';
import { charges, discharges } from '../../src/commands.ts';
import { createEstimator, type IceEstimate } from '../../src/estimation/estimator.ts';
import { quantile } from '../../src/numerics/quantile.ts';
import { bankLimits } from '../../src/plant/bank.ts';
import type { Reading } from '../../src/points.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS } from '../../src/time.ts';
import type { BenchOptions, BenchResult } from './bench.ts';
import { Bookkeeping } from './ice-bookkeeping.ts';
import { build, CYCLE_MS, scenarios, SENSOR_SETS, solarTime, type Scenario } from './ice-scenarios.ts';

/** Nobody told the estimator how much ice there was: it is scored from the second day on. */
const SCORED_AFTER_MS = DAY_MS;
const SCORED_EVERY_MS = 20 * MINUTE_MS;

interface Score {
  readonly scenario: Scenario;
  readonly seed: number;
  readonly errors: number[];
  readonly covered: number;
  readonly widths: number[];
  readonly bookErrors: number[];
  readonly emptyMin: number[];
  readonly updateMs: number[];
}

export async function run(options: BenchOptions): Promise<BenchResult> {
  const all = scenarios();
  const chosen = options.quick ? all.filter((_, i) => i % 4 === Math.floor(i / 6) % 4) : all;
  const seeds = options.quick ? [0] : [0, 1, 2];
  const days = options.quick ? 10 : 12;
  const scores: Score[] = [];
  for (const scenario of chosen) {
    for (const seed of seeds) {
      scores.push(play(scenario, options.seed * 1000 + seed, days));
      await Promise.resolve();
    }
  }
  return report(chosen, scores, days, seeds.length);
}

export function play(
  scenario: Scenario,
  seed: number,
  days: number,
  watch?: (
    atMs: number,
    estimate: IceEstimate,
    truth: ReturnType<ReturnType<typeof build>['simulator']['truth']>,
  ) => void,
): Score {
  const bench = build(scenario, seed);
  const { site, simulator, operator, startMs } = bench;
  const capacityKwh = bankLimits(site).capacityKwh;
  const estimator = createEstimator(site, { seed, startMs });
  const books = new Bookkeeping(site, simulator.truth().iceOnHandKwh);
  const score = {
    scenario,
    seed,
    errors: [],
    covered: 0,
    widths: [],
    bookErrors: [],
    emptyMin: [],
    updateMs: [],
  } as {
    -readonly [K in keyof Score]: Score[K];
  };
  const empties = new EmptyWatch(capacityKwh);
  for (let atMs = startMs; atMs < startMs + days * DAY_MS;) {
    const before = simulator.truth();
    const { hour, day } = solarTime(atMs);
    const command = operator.command(hour, day, before.inventoryPct / 100, before.iceOnHandKwh / capacityKwh);
    simulator.switch('chiller', charges(command));
    simulator.switch('pump', discharges(command));
    simulator.switch('fan', discharges(command));
    atMs += CYCLE_MS;
    const readings: Reading[] = bench.heard(simulator.advance(atMs));
    const begun = performance.now();
    estimator.advance(atMs, readings, scenario.ordered ? command : null);
    score.updateMs.push(performance.now() - begun);
    books.advance(readings, CYCLE_MS, command);
    if (atMs - startMs < SCORED_AFTER_MS) continue;
    const due = (atMs - startMs) % SCORED_EVERY_MS === 0;
    if (!due && !discharges(command)) continue;
    const truth = simulator.truth();
    const estimate = estimator.estimate();
    empties.look(atMs, truth.iceOnHandKwh, estimate, discharges(command));
    if (!due) continue;
    score.errors.push((100 * (estimate.iceOnHandKwh - truth.iceOnHandKwh)) / capacityKwh);
    score.bookErrors.push((100 * (books.onHandKwh - truth.iceOnHandKwh)) / capacityKwh);
    score.widths.push((100 * (estimate.highKwh - estimate.lowKwh)) / capacityKwh);
    if (truth.iceOnHandKwh >= estimate.lowKwh && truth.iceOnHandKwh <= estimate.highKwh) score.covered += 1;
    watch?.(atMs, estimate, truth);
  }
  score.emptyMin = empties.errorsMin;
  return score;
}

/** Ice on hand, as part of capacity, at which a bank serves nobody any more. */
const EMPTY_PART = 0.1;
/** How long before that the question is put. */
const ASKED_MS = HOUR_MS;

/** Asks an hour before the bank is really empty when it will be, at the heat that flows then. */
class EmptyWatch {
  readonly errorsMin: number[] = [];
  private readonly emptyKwh: number;
  private asked: { atMs: number; saysMs: number }[] = [];

  constructor(capacityKwh: number) {
    this.emptyKwh = EMPTY_PART * capacityKwh;
  }

  look(atMs: number, trueKwh: number, estimate: IceEstimate, melting: boolean): void {
    if (!melting) {
      this.asked = [];
      return;
    }
    const outKw = (estimate.dischargingW + estimate.leakW - estimate.chargingW) / 1000;
    const leftH = Math.max(0, estimate.iceOnHandKwh - this.emptyKwh) / Math.max(0.05, outKw);
    if (trueKwh > this.emptyKwh) {
      this.asked.push({ atMs, saysMs: atMs + Math.min(leftH, 24) * HOUR_MS });
      return;
    }
    const then = this.asked.find((one) => one.atMs >= atMs - ASKED_MS);
    if (then && then.atMs - (atMs - ASKED_MS) < 5 * MINUTE_MS) {
      this.errorsMin.push(Math.abs(then.saysMs - atMs) / MINUTE_MS);
    }
    this.asked = [];
  }
}

const rms = (values: readonly number[]): number =>
  Math.sqrt(values.reduce((sum, value) => sum + value * value, 0) / Math.max(1, values.length));
const mean = (values: readonly number[]): number =>
  values.reduce((sum, value) => sum + value, 0) / Math.max(1, values.length);
const coverage = (scores: readonly Score[]): number =>
  (100 * scores.reduce((sum, score) => sum + score.covered, 0)) /
  scores.reduce((sum, score) => sum + score.errors.length, 0);
const round = (value: number, digits = 2): number => Number(value.toFixed(digits));

function report(
  chosen: readonly Scenario[],
  scores: readonly Score[],
  days: number,
  seeds: number,
): BenchResult {
  const rows = chosen.map((scenario) => {
    const own = scores.filter((score) => score.scenario === scenario);
    const empty = own.flatMap((score) => score.emptyMin);
    return [
      scenario.form,
      `(${scenario.set})`,
      scenario.pattern,
      scenario.trouble,
      round(rms(own.flatMap((score) => score.errors))),
      round(Math.max(...own.map((score) => rms(score.errors)))),
      round(mean(own.flatMap((score) => score.errors))),
      round(coverage(own), 1),
      round(mean(own.flatMap((score) => score.widths)), 1),
      round(rms(own.flatMap((score) => score.bookErrors)), 1),
      empty.length > 0 ? round(quantile(empty, 0.5), 0) : '-',
    ];
  });
  return {
    title: `Ice on hand, ${chosen.length} scenarios × ${seeds} seeds × ${days} days, scored from the second day, % of capacity`,
    budget:
      'held against: RMSE ≤ 3 over all, worst ≤ 6 (set a ≤ 8), 90 % interval covers 85–95, bookkeeping ≥ 3 × worse, empty time ≤ 15 min, update ≤ 0.5 ms',
    columns: [
      'form',
      'set',
      'pattern',
      'trouble',
      'rmse',
      'worst',
      'bias',
      'cover',
      'width',
      'books',
      'empty min',
    ],
    rows,
    figures: figuresOf(scores),
    drawing: drawingOf(scores),
  };
}

/** By sensor set: error of the estimate, half of its interval, and bookkeeping, as bars of one per cent a sign. */
function drawingOf(scores: readonly Score[]): string[] {
  const bar = (value: number, sign: string): string => sign.repeat(Math.round(value));
  const heading =
    '# error of the estimate, - half of its 90 % interval, + bookkeeping alone; RMSE, one sign 1 %';
  return [
    heading,
    ...SENSOR_SETS.flatMap((set) => {
      const own = scores.filter((score) => score.scenario.set === set);
      if (own.length === 0) return [];
      return [
        `(${set}) ${bar(rms(own.flatMap((score) => score.errors)), '#')}`,
        `    ${bar(mean(own.flatMap((score) => score.widths)) / 2, '-')}`,
        `    ${bar(rms(own.flatMap((score) => score.bookErrors)), '+')}`,
      ];
    }),
  ];
}

function emptyFigure(scores: readonly Score[]): Record<string, number> {
  const all = scores.flatMap((score) => score.emptyMin);
  return all.length === 0 ? {} : { emptyTimeErrorMin: round(quantile(all, 0.5), 1), emptyTimes: all.length };
}

function figuresOf(scores: readonly Score[]): Record<string, number> {
  const figures: Record<string, number> = {
    rmsePct: round(rms(scores.flatMap((score) => score.errors))),
    worstRmsePct: round(Math.max(...scores.map((score) => rms(score.errors)))),
    coverage90Pct: round(coverage(scores), 1),
    balanceOnlyRmsePct: round(rms(scores.flatMap((score) => score.bookErrors))),
    ...emptyFigure(scores),
    updateMsMedian: round(
      quantile(
        scores.flatMap((score) => score.updateMs),
        0.5,
      ),
      3,
    ),
    updateMs99: round(
      quantile(
        scores.flatMap((score) => score.updateMs),
        0.99,
      ),
      3,
    ),
  };
  for (const set of SENSOR_SETS) {
    const own = scores.filter((score) => score.scenario.set === set);
    if (own.length === 0) continue;
    figures[`rmsePct-${set}`] = round(rms(own.flatMap((score) => score.errors)));
    figures[`worstRmsePct-${set}`] = round(Math.max(...own.map((score) => rms(score.errors))));
    figures[`coverage90Pct-${set}`] = round(coverage(own), 1);
    figures[`widthPct-${set}`] = round(mean(own.flatMap((score) => score.widths)), 1);
  }
  return figures;
}
