/**
 * Late readings in their right place: the estimator is set back to a checkpoint before them and lives on from there
 * with everything that the store now knows. Also how a restart takes up where the last checkpoint stood.
 */
import type { Command } from '../commands.ts';
import type { SiteConfig } from '../config.ts';
import { createEstimator, type Estimator } from '../estimation/estimator.ts';
import type { Store } from '../store/store.ts';
import { DAY_MS, HOUR_MS, MINUTE_MS } from '../time.ts';

export interface Checkpoint {
  readonly atMs: number;
  readonly memory: unknown;
}

/** Time between checkpoints, and how far back they reach: a sensor may keep a day of readings to itself. */
export const CHECKPOINT_MS = HOUR_MS / 2;
export const REACH_MS = DAY_MS;
/** Readings later than this no longer fit into the estimator's own step. */
export const LATE_MS = 10 * MINUTE_MS;
/** How much is replayed in one go; bounds the memory it takes. */
const REPLAY_STEP_MS = HOUR_MS;

export function keepCheckpoint(checkpoints: readonly Checkpoint[], next: Checkpoint): Checkpoint[] {
  return [...checkpoints.filter((one) => one.atMs < next.atMs && next.atMs - one.atMs <= REACH_MS), next];
}

/** The last checkpoint before an instant, or null when none reaches back so far. */
export function checkpointBefore(checkpoints: readonly Checkpoint[], atMs: number): Checkpoint | null {
  return checkpoints.findLast((one) => one.atMs < atMs) ?? null;
}

/** An estimator that stands at `toMs`, from a checkpoint and what the store holds since then. */
export function replay(
  config: SiteConfig,
  store: Store,
  from: Checkpoint,
  toMs: number,
  seed: number,
): Estimator {
  const estimator = createEstimator(config, { seed, startMs: from.atMs, memory: from.memory });
  const records = store.recordsBetween(from.atMs, toMs);
  let next = 0;
  let ordered: Command | null = null;
  for (let startMs = from.atMs; startMs < toMs;) {
    // in steps of one order: what was ordered tells whether water flowed where no power point does
    const record = records[next];
    const endMs = Math.min(
      toMs,
      startMs + REPLAY_STEP_MS,
      record && record.atMs > startMs ? record.atMs : Number.POSITIVE_INFINITY,
    );
    estimator.advance(endMs, store.readingsBetween(startMs, endMs), ordered);
    while (next < records.length && records[next].atMs <= endMs) {
      ordered = records[next].command;
      next += 1;
    }
    startMs = endMs;
  }
  return estimator;
}
