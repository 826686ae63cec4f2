/** Reading the strip at an instant: the values beneath the reading line, and the rows of the table. */
import type { Mode } from '../../commands.ts';
import type { Range, Sample, Stretch, StripData } from './strip-data.ts';

export interface StripReading {
  readonly atMs: number;
  /** Whether the values are the plan's, not the pen's. */
  readonly ahead: boolean;
  readonly price: number | null;
  readonly outdoorC: number | null;
  readonly roomC: number | null;
  readonly limitC: number | null;
  readonly iceKwh: number | null;
  readonly iceLowKwh: number | null;
  readonly iceHighKwh: number | null;
  readonly mode: Mode | null;
  readonly thoughtIceKwh: number | null;
}

/** A sample farther away than this does not speak for an instant. */
const NEAR_MS = 600_000;

export function readStrip(data: StripData, atMs: number): StripReading {
  const ahead = atMs > data.nowMs;
  const range = nearest(ahead ? data.iceAheadRange : data.iceRange.flat(), atMs);
  return {
    atMs,
    ahead,
    price: stretchAt(ahead ? data.price.ahead : data.price.past, atMs),
    outdoorC: valueAt(ahead ? data.outdoorAhead : data.outdoor.flat(), atMs),
    roomC: ahead ? null : valueAt(data.room.flat(), atMs),
    limitC: ahead ? null : valueAt(data.limit.flat(), atMs),
    iceKwh: valueAt(ahead ? data.iceAhead : data.ice.flat(), atMs),
    iceLowKwh: range?.low ?? null,
    iceHighKwh: range?.high ?? null,
    mode: stretchAt(ahead ? data.runs.ahead : data.runs.past, atMs),
    thoughtIceKwh: data.thought && valueAt(data.thought.ice, atMs),
  };
}

function nearest<T extends Sample | Range>(samples: readonly T[], atMs: number): T | null {
  let best: T | null = null;
  for (const sample of samples) {
    if (Math.abs(sample.atMs - atMs) <= (best ? Math.abs(best.atMs - atMs) : NEAR_MS)) best = sample;
  }
  return best;
}

const valueAt = (samples: readonly Sample[], atMs: number): number | null =>
  nearest(samples, atMs)?.value ?? null;

function stretchAt<T>(list: readonly Stretch<T>[], atMs: number): T | null {
  const last = list.at(-1);
  if (last && atMs > last.toMs && atMs - last.toMs <= NEAR_MS) return last.value;
  return list.find(({ fromMs, toMs }) => atMs >= fromMs && atMs <= toMs)?.value ?? null;
}
