/**
 * Today's offset from the hourly bins and what becomes of it: for each hour of lead a ridge regression of the offset
 * then on what is known now, trained on the own past only. Its prior is an offset that fades, so it works from the
 * first day and bends to the site's own weather with the weeks.
 */
import { hourBins, hourOfDay, type HourSeries } from './bins.ts';
import { addRow, normalEquations, solveNormal } from './normal-equations.ts';

/** Past that is trained on, h. */
const TRAIN_HOURS = 45 * 24;
/** Neighbouring hours tell nearly the same: one row counts as this part of an independent one. */
const ROW_WEIGHT = 1 / 8;
/** How an offset fades before anything is learned. */
export interface Fading {
  /** Of the last hour, per hour, and of the day's mean, h. */
  readonly quick: number;
  readonly slowHours: number;
  /** Part of it that fades so; the rest is gone at once. */
  readonly share: number;
  /** Counts as this many independent rows; eight are a day. */
  readonly rows: number;
}

/** Keeps the prior of a feature that never moved from vanishing. */
const LEAST_VARIANCE = 1e-4;
const FEATURES = 7;

/** What is known at an hour: offsets of the main series, its daily wave, and a companion series. */
interface Known {
  readonly now: number;
  readonly day: number;
  readonly dayBefore: number;
  readonly cosine: number;
  readonly sine: number;
  readonly companionDay: number;
  readonly companionNow: number;
}

export interface AnomalyModel {
  readonly bins: Float64Array;
  /** Coefficients by hour of lead, from 1. */
  readonly byLead: readonly Float64Array[];
}

/** Trains on the series up to its last hour. The companion (dew point beside temperature) may be null. */
export function fitAnomaly(
  series: HourSeries,
  prior: readonly number[],
  companion: HourSeries | null,
  fading: Fading,
  leads: number,
): AnomalyModel {
  const bins = hourBins(series, prior);
  const offsets = offsetsOf(series, bins);
  const beside = companion && offsetsOf(companion, companionBins(companion));
  const known = offsets.map((_, i) => knownAt(offsets, beside, series.firstHour, i));
  const scale = variances(known);
  const byLead = Array.from({ length: leads }, (_, i) =>
    fitLead(offsets, known, series.firstHour, fading, i + 1, scale),
  );
  return { bins, byLead };
}

const companionBins = (companion: HourSeries): Float64Array => {
  const present = companion.values.filter((value) => value !== null);
  const mean = present.reduce((sum, value) => sum + value, 0) / Math.max(1, present.length);
  return hourBins(
    companion,
    Array.from({ length: 24 }, () => mean),
  );
};

/** The forecast for leads 1 … of the model from the last hour of the series. */
export function predictAnomaly(
  model: AnomalyModel,
  series: HourSeries,
  companion: HourSeries | null,
): Float64Array {
  const offsets = offsetsOf(series, model.bins);
  const beside = companion && offsetsOf(companion, companionBins(companion));
  const last = offsets.length - 1;
  const known = last >= 0 ? knownAt(offsets, beside, series.firstHour, last) : null;
  return Float64Array.from(model.byLead, (coefficients, i) => {
    const target = series.firstHour + last + i + 1;
    const base = model.bins[hourOfDay(target)];
    if (!known) return base;
    const row = rowOf(known, target);
    return row.reduce((sum, value, j) => sum + value * coefficients[j], base);
  });
}

function offsetsOf({ values, firstHour }: HourSeries, bins: Float64Array): (number | null)[] {
  return values.map((value, i) => (value === null ? null : value - bins[hourOfDay(firstHour + i)]));
}

/** null until a first offset is known. Night-less series (clearness) have gaps: means are over what is there. */
function knownAt(
  offsets: readonly (number | null)[],
  beside: readonly (number | null)[] | null,
  firstHour: number,
  at: number,
): Known | null {
  const day = meanOver(offsets, at - 23, at);
  if (day === null) return null;
  const wave = dailyWave(offsets, firstHour, at, day);
  const companionDay = beside ? (meanOver(beside, at - 23, at) ?? 0) : 0;
  return {
    now: meanOver(offsets, at - 1, at) ?? day,
    day,
    dayBefore: meanOver(offsets, at - 47, at - 24) ?? day,
    cosine: wave[0],
    sine: wave[1],
    companionDay,
    companionNow: beside?.[at] ?? companionDay,
  };
}

function meanOver(values: readonly (number | null)[], from: number, to: number): number | null {
  let sum = 0;
  let count = 0;
  for (let i = Math.max(0, from); i <= to && i < values.length; i += 1) {
    const value = values[i];
    if (value === null) continue;
    sum += value;
    count += 1;
  }
  return count > 0 ? sum / count : null;
}

const ANGLE = (2 * Math.PI) / 24;
const COSINES = Float64Array.from({ length: 24 }, (_, hour) => Math.cos(ANGLE * hour));
const SINES = Float64Array.from({ length: 24 }, (_, hour) => Math.sin(ANGLE * hour));

/** First harmonic of the last day's offsets: a wide daily range today is likely wide tomorrow. */
function dailyWave(
  offsets: readonly (number | null)[],
  firstHour: number,
  at: number,
  day: number,
): readonly [number, number] {
  let cosine = 0;
  let sine = 0;
  for (let i = Math.max(0, at - 23); i <= at; i += 1) {
    const offset = offsets[i];
    if (offset === null) continue;
    const hour = hourOfDay(firstHour + i);
    cosine += ((offset - day) * COSINES[hour]) / 12;
    sine += ((offset - day) * SINES[hour]) / 12;
  }
  return [cosine, sine];
}

function rowOf(known: Known, target: number): number[] {
  const hour = hourOfDay(target);
  const wave = known.cosine * COSINES[hour] + known.sine * SINES[hour];
  return [
    known.now - known.day,
    known.day,
    known.dayBefore - known.day,
    wave,
    known.companionDay,
    known.companionNow - known.companionDay,
    1,
  ];
}

const priorOf = (fading: Fading, lead: number): number[] => [
  fading.share * fading.quick ** lead,
  fading.share * Math.exp(-lead / fading.slowHours),
  0,
  0.4 * fading.share * Math.exp(-lead / fading.slowHours),
  0,
  0,
  0,
];

function variances(known: readonly (Known | null)[]): Float64Array {
  const sums = new Float64Array(FEATURES);
  let count = 0;
  for (const [i, state] of known.entries()) {
    if (!state) continue;
    for (const [j, value] of rowOf(state, i).entries()) sums[j] += value * value;
    count += 1;
  }
  return sums.map((sum) => Math.max(LEAST_VARIANCE, sum / Math.max(1, count)));
}

function fitLead(
  offsets: readonly (number | null)[],
  known: readonly (Known | null)[],
  firstHour: number,
  fading: Fading,
  lead: number,
  scale: Float64Array,
): Float64Array {
  const prior = priorOf(fading, lead);
  const equations = normalEquations(
    prior,
    scale.map((variance) => fading.rows * variance),
  );
  for (let i = Math.max(0, offsets.length - TRAIN_HOURS); i + lead < offsets.length; i += 1) {
    const state = known[i];
    const then = offsets[i + lead];
    if (state && then !== null) addRow(equations, rowOf(state, firstHour + i + lead), then, ROW_WEIGHT);
  }
  return solveNormal(equations) ?? Float64Array.from(prior);
}
