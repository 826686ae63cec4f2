/**
 * What it thought at noon against what came. Slot by slot for the outdoor air, as a sum for the evening load. The score
 * over three percentiles is twice the mean pinball loss, which tends to the CRPS as percentiles are added
 * (Gneiting & Ranjan 2011, Journal of Business & Economic Statistics 29(3), eq. 10). "Yesterday again" is the baseline.
 */
import type { CycleRecord, PlanRecord, PlanStep } from '../record.ts';
import { DAY_MS, formatInstant, HOUR_MS, type Night } from '../time.ts';
import type { NightSheet } from './night-schema.ts';
import { bySlot, energyKwh, hoursOf, meanOver, rounded, roundedOrNull, spansOf, type Span } from './spans.ts';

type Forecast = NonNullable<NightSheet['forecast']>;
/** A plan made within this time of noon still counts as the noon's. */
const NOON_GRACE_MS = 30 * 60_000;
/** Share of the discharging time in which delivery must be known for it to stand for the load. */
const ENOUGH_DELIVERED = 0.8;
/** A slot counts when this share of it was recorded. */
const ENOUGH_SLOT = 0.5;

/** The plan that stood at noon: the last one made by then, else the first of the night. */
export function noonPlan(plans: readonly PlanRecord[], night: Night): PlanRecord | null {
  const known = plans.filter((plan) => plan.steps.length > 0 && plan.madeMs < night.endMs);
  const before = known.filter(
    (plan) => plan.madeMs <= night.startMs + NOON_GRACE_MS && plan.madeMs > night.startMs - HOUR_MS,
  );
  return before.at(-1) ?? known.find((plan) => plan.madeMs > night.startMs) ?? null;
}

export function forecastOf(
  plan: PlanRecord | null,
  spans: readonly Span[],
  night: Night,
  recordsBefore: readonly CycleRecord[],
): Forecast | null {
  if (plan === null || spans.length === 0) return null;
  const steps = plan.steps.filter(
    (step) => step.startMs >= night.startMs && step.startMs + plan.slotMs <= night.endMs,
  );
  const came = bySlot(spans, night.startMs, plan.slotMs);
  const yesterday = bySlot(
    spansOf(recordsBefore, { date: '', startMs: night.startMs - DAY_MS, endMs: night.startMs }),
    night.startMs - DAY_MS,
    plan.slotMs,
  );
  const pairs = steps.flatMap((step) => {
    const slot = Math.floor((step.startMs - night.startMs) / plan.slotMs);
    const part = came.get(slot) ?? [];
    if (hoursOf(part) < (ENOUGH_SLOT * plan.slotMs) / HOUR_MS) return [];
    return [{ step, part, yesterday: yesterday.get(slot) ?? [] }];
  });
  return {
    made: formatInstant(plan.madeMs),
    knows: plan.forecastKnows,
    outdoor: outdoorOf(pairs),
    load: loadOf(pairs, plan.slotMs),
  };
}

interface Pair {
  readonly step: PlanStep;
  readonly part: readonly Span[];
  readonly yesterday: readonly Span[];
}

function outdoorOf(pairs: readonly Pair[]): Forecast['outdoor'] {
  const scored = pairs.flatMap(({ step, part, yesterday }) => {
    const truth = meanOver(part, (record) => record.outdoorC);
    const before = meanOver(yesterday, (record) => record.outdoorC);
    return truth === null ? [] : [{ step, truth, before }];
  });
  if (scored.length === 0) return null;
  const withBefore = scored.filter((one) => one.before !== null);
  return {
    meanErrorK: rounded(mean(scored.map(({ step, truth }) => step.outdoorC - truth)), 3),
    meanAbsK: rounded(mean(scored.map(({ step, truth }) => Math.abs(step.outdoorC - truth))), 3),
    crpsK: rounded(mean(scored.map(({ step, truth }) => threePointScore(step, truth))), 3),
    insidePct: rounded(
      100 *
        mean(
          scored.map(({ step, truth }) => Number(truth >= step.outdoorLowC && truth <= step.outdoorHighC)),
        ),
      1,
    ),
    yesterdayMeanAbsK:
      withBefore.length < scored.length / 2
        ? null
        : rounded(mean(withBefore.map(({ truth, before }) => Math.abs((before ?? 0) - truth))), 3),
    slots: scored.length,
  };
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

function threePointScore(step: PlanStep, truth: number): number {
  const pinball = (q: number, p: number): number => (truth >= q ? p * (truth - q) : (1 - p) * (q - truth));
  return (
    (2 / 3) * (pinball(step.outdoorLowC, 0.1) + pinball(step.outdoorC, 0.5) + pinball(step.outdoorHighC, 0.9))
  );
}

/** Load over the slots that were recorded; low and high add up the slots' own bounds, as if all erred one way. */
function loadOf(pairs: readonly Pair[], slotMs: number): Forecast['load'] {
  if (pairs.length === 0) return null;
  const hours = slotMs / HOUR_MS;
  const sum = (pick: (step: PlanStep) => number): number =>
    pairs.reduce((total, { step }) => total + (pick(step) * hours) / 1000, 0);
  const spans = pairs.flatMap((pair) => pair.part);
  const came = loadThatCame(spans);
  const before = pairs.flatMap((pair) => pair.yesterday);
  const expectedKwh = sum((step) => step.loadW);
  const [lowKwh, highKwh] = [sum((step) => step.loadLowW), sum((step) => step.loadHighW)];
  return {
    expectedKwh: rounded(expectedKwh, 3),
    lowKwh: rounded(lowKwh, 3),
    highKwh: rounded(highKwh, 3),
    cameKwh: rounded(came.kwh, 3),
    cameFrom: came.from,
    errorPct: came.kwh > 0.1 ? rounded((expectedKwh / came.kwh - 1) * 100, 1) : null,
    inside: came.kwh >= lowKwh && came.kwh <= highKwh,
    yesterdayKwh: before.length === 0 ? null : roundedOrNull(loadThatCame(before).kwh, 3),
  };
}

export function loadThatCame(spans: readonly Span[]): { kwh: number; from: 'delivered' | 'melted' } {
  const cooling = spans.filter(({ record }) => record.dischargingW > 0);
  const known = hoursOf(cooling, (record) => record.deliveredW !== null);
  return known >= ENOUGH_DELIVERED * hoursOf(cooling)
    ? { kwh: energyKwh(spans, (record) => record.deliveredW), from: 'delivered' }
    : { kwh: energyKwh(spans, (record) => record.dischargingW), from: 'melted' };
}
