/** A median with its standard error from readings that follow each other closely. */
import { quantile } from '../numerics/quantile.ts';
import { MINUTE_MS } from '../time.ts';

export interface Sample {
  readonly atMs: number;
  readonly value: number;
}

export interface Steady {
  readonly value: number;
  readonly error: number;
}

const BLOCK_MS = 10 * MINUTE_MS;
const LEAST_BLOCKS = 3;
/** Standard deviation of a normal quantity over its median absolute deviation, and of its median over that of its mean. */
const [MAD_TO_SD, MEDIAN_TO_MEAN] = [1.4826, 1.2533];

/**
 * Median of the block medians, and its standard error from their spread: readings half a minute apart are hardly independent,
 * those of different ten minutes nearly are (batch means: Conway 1963, Management Science 10(1)). Null under half an hour.
 */
export function steadyOf(samples: readonly Sample[]): Steady | null {
  const medians = blockMedians(samples);
  return medians.length < LEAST_BLOCKS ? null : judged(medians, quantile(medians, 0.5));
}

/**
 * The same about the middle of the shortest half of the block medians instead of their median: the level at which a quantity
 * that also climbs and falls stayed longest (Rousseeuw 1984, Journal of the American Statistical Association 79(388)).
 */
export function longestAt(samples: readonly Sample[]): Steady | null {
  const sorted = blockMedians(samples).toSorted((a, b) => a - b);
  if (sorted.length < LEAST_BLOCKS) return null;
  const half = Math.ceil(sorted.length / 2);
  let first = 0;
  for (let i = 1; i + half <= sorted.length; i++) {
    if (sorted[i + half - 1] - sorted[i] < sorted[first + half - 1] - sorted[first]) first = i;
  }
  const shortest = sorted.slice(first, first + half);
  return judged(shortest, quantile(shortest, 0.5));
}

/** In order of time. */
export function blockMedians(samples: readonly Sample[]): number[] {
  const blocks = new Map<number, number[]>();
  for (const { atMs, value } of samples) {
    const block = Math.floor(atMs / BLOCK_MS);
    const held = blocks.get(block);
    if (held === undefined) blocks.set(block, [value]);
    else held.push(value);
  }
  return [...blocks.values()].map((values) => quantile(values, 0.5));
}

function judged(medians: readonly number[], value: number): Steady {
  const mad = quantile(
    medians.map((one) => Math.abs(one - value)),
    0.5,
  );
  return { value, error: (MAD_TO_SD * MEDIAN_TO_MEAN * mad) / Math.sqrt(medians.length) };
}
