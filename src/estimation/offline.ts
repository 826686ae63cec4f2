/** The same estimator over a reading log, for a log that was recorded without rimehold. */
import type { SiteConfig } from '../config.ts';
import type { Reading } from '../points.ts';
import { DAY_MS, MINUTE_MS } from '../time.ts';
import { createEstimator, type IceEstimate } from './estimator.ts';

export interface LogRow {
  readonly atMs: number;
  readonly iceOnHandKwh: number;
  readonly lowKwh: number;
  readonly highKwh: number;
  readonly iceKg: number;
  readonly inventoryPct: number;
  /** What the leaving probe was expected to read, before it was read; null without flow. */
  readonly predictedLeavingC: number | null;
}

export interface LogOptions {
  /** Time between rows, at least a minute. */
  readonly stepMs?: number;
  readonly seed?: number;
  /** What somebody knows of the bank as the log begins. */
  readonly begins?: 'empty' | 'full';
}

/** A longer silence is passed over without rows: nothing is known of the ice after it (and one date may be absurd). */
export const LONGEST_SILENCE_MS = 3 * DAY_MS;

/** End of the step that holds an instant; a step's own end belongs to it. */
const stepEndMs = (atMs: number, stepMs: number): number => Math.floor(atMs / stepMs) * stepMs - 1 + stepMs;

/** Runs over readings sorted by time and gives a row for each step. Nothing was ordered: powers and temperatures tell. */
export function estimateLog(
  config: SiteConfig,
  readings: Iterable<Reading>,
  { stepMs = MINUTE_MS, seed = 1, begins }: LogOptions = {},
): LogRow[] {
  const rows: LogRow[] = [];
  let batch: Reading[] = [];
  let toMs = Number.NaN;
  let estimator: ReturnType<typeof createEstimator> | null = null;
  const close = (): void => {
    estimator?.advance(toMs, batch, null);
    if (estimator) rows.push(rowOf(estimator.estimate()));
    batch = [];
  };
  for (const reading of readings) {
    if (!estimator) {
      toMs = stepEndMs(reading.atMs, stepMs);
      estimator = createEstimator(config, { seed, startMs: toMs - stepMs });
      if (begins) estimator.anchor(begins);
    }
    while (reading.atMs > toMs) {
      close();
      const silent = reading.atMs - toMs > LONGEST_SILENCE_MS;
      toMs = silent ? stepEndMs(reading.atMs, stepMs) : toMs + stepMs;
    }
    batch.push(reading);
  }
  close();
  return rows;
}

function rowOf(estimate: IceEstimate): LogRow {
  const { atMs, iceOnHandKwh, lowKwh, highKwh, iceKg, inventoryPct, predictedLeavingC } = estimate;
  return { atMs, iceOnHandKwh, lowKwh, highKwh, iceKg, inventoryPct, predictedLeavingC };
}
