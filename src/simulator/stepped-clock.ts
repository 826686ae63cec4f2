/** A clock that moves only when it is told to; everything due on the way is called in order. For tests. */
import type { Clock } from '../time.ts';

export interface SteppedClock extends Clock {
  /** Moves on, calling what falls due at its own instant, in order of time and then of registration. */
  advance(byMs: number): void;
}

interface Due {
  atMs: number;
  readonly order: number;
  readonly periodMs: number | null;
  readonly callback: () => void;
}

export function createSteppedClock(startMs: number): SteppedClock {
  let nowMs = startMs;
  let order = 0;
  const waiting = new Set<Due>();

  const add = (atMs: number, periodMs: number | null, callback: () => void): (() => void) => {
    const due: Due = { atMs, order: order++, periodMs, callback };
    waiting.add(due);
    return () => waiting.delete(due);
  };
  const next = (untilMs: number): Due | null => {
    let first: Due | null = null;
    for (const due of waiting) {
      if (due.atMs > untilMs) continue;
      if (!first || due.atMs < first.atMs || (due.atMs === first.atMs && due.order < first.order))
        first = due;
    }
    return first;
  };

  return {
    nowMs: () => nowMs,
    after: (delayMs, callback) => add(nowMs + Math.max(0, delayMs), null, callback),
    every: (periodMs, callback) => {
      if (!(periodMs > 0)) throw new RangeError(`Expected a period above 0 ms, found ${periodMs}.`);
      return add(nowMs + periodMs, periodMs, callback);
    },
    advance: (byMs) => {
      const untilMs = nowMs + byMs;
      for (let due = next(untilMs); due; due = next(untilMs)) {
        nowMs = Math.max(nowMs, due.atMs);
        if (due.periodMs === null) waiting.delete(due);
        else due.atMs += due.periodMs;
        due.callback();
      }
      nowMs = untilMs;
    },
  };
}
