/**
 * What planning is worth: the plan against itself with foresight and against the simple strategies, night after night
 * in the truth plant. The plan knows only what it would in life: it estimates the ice from faulty probes, forecasts
 * from what it has seen, and learns on the way. The others are told the true ice and foresee the plan's own mean;
 * foresight is told the weather and the load that will be. The plan that is told the true ice shows what the estimate
 * costs; whatever it is off by is weather.
 *
 * Ice (and battery) left at the end counts for everybody at the cheapest it can be made for.
 */
import { fork } from 'node:child_process';
import { quantile } from '../../src/numerics/quantile.ts';
import { milpGaps } from '../planning/milp-gap.ts';
import type { BenchOptions, BenchResult } from './bench.ts';
import { RUNS, type CaseOrder, type CaseResult, type Run } from './plan-case.ts';

/** Three weeks of learning: the forecasts' spread is honest only when it rests on some weeks of the site's own past. */
const NIGHTS = 60;
const WARM_UP_DAYS = 21;
/** The cases of `planCases`, in their order. */
const CASES = [0, 1, 2, 3] as const;
const PROCESSES = 2;

export async function run({ seed, quick, nights: asked }: BenchOptions): Promise<BenchResult> {
  const nights = asked ?? (quick ? 2 : NIGHTS);
  const warmUpDays = quick ? 5 : WARM_UP_DAYS;
  const results = await inProcesses(CASES.map((index) => ({ seed, index, nights, warmUpDays })));
  const gaps = await milpGaps(seed, quick ? 5 : 50);
  const lpGapPct = gaps.reduce((sum, gap) => sum + gap.gapPct, 0) / gaps.length;
  return {
    title: `Plan: ${nights} nights × ${results.length} cases in the truth plant, after ${warmUpDays} days of learning`,
    budget:
      'cost at most 3 % over foresight, no simple strategy cheaper at as few warm hours; published spread: storage priority about 6 %, chiller priority up to 20 % over optimum (Drees & Braun 1996); solve at most 25 ms; gap to HiGHS at most 1 %; some 12 minutes of one core',
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

/** Cases are worlds of their own, so they are lived side by side; which process lives which changes nothing. */
async function inProcesses(orders: readonly CaseOrder[]): Promise<CaseResult[]> {
  const results: CaseResult[] = [];
  const waiting = [...orders.entries()];
  const worker = async (): Promise<void> => {
    for (let next = waiting.shift(); next; next = waiting.shift())
      results[next[0]] = await inProcess(next[1]);
  };
  await Promise.all(Array.from({ length: PROCESSES }, worker));
  return results;
}

function inProcess(order: CaseOrder): Promise<CaseResult> {
  return new Promise((resolve, reject) => {
    const child = fork(new URL('plan-part.ts', import.meta.url));
    child.once('message', (result) => resolve(result as CaseResult));
    child.once('error', reject);
    child.once('exit', (code) => reject(new Error(`case ${order.index} ended with ${code} and no result`)));
    child.send(order);
  });
}

const overPct = (result: CaseResult, name: Run): number =>
  100 * (result.money[name] / result.money.foresight - 1);

function rowOf(result: CaseResult, name: Run): (string | number)[] {
  const outcome = result.runs[name];
  const warm = outcome.warmKh / result.nights;
  return [
    result.name,
    name,
    result.money[name].toFixed(2),
    overPct(result, name).toFixed(1),
    warm.toFixed(2),
    (result.money[name] + result.warmHourPrice * outcome.warmKh).toFixed(2),
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
    trueIceOverForesightPct: over('planned, true ice'),
    storagePriorityOverForesightPct: over('storage-priority'),
    chillerPriorityOverForesightPct: over('chiller-priority'),
    timetableOverForesightPct: over('timetable'),
    warmHoursPerNight: warm('planned'),
    trueIceWarmHoursPerNight: warm('planned, true ice'),
    foresightWarmHoursPerNight: warm('foresight'),
    storagePriorityWarmHoursPerNight: warm('storage-priority'),
    chillerPriorityWarmHoursPerNight: warm('chiller-priority'),
    timetableWarmHoursPerNight: warm('timetable'),
  };
}
