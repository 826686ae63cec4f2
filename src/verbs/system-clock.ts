/** The real clock. Periods are counted from the start of each, so that a clock set by the network does not flood. */
import type { Clock } from '../time.ts';

/** Node's timers hold a signed 32-bit number of milliseconds. */
const MOST_TIMER_MS = 2 ** 31 - 1;

export function systemClock(): Clock {
  return {
    nowMs: () => Date.now(),
    // Monotonic since boot, so that it also spans a restart of this program.
    steadyMs: () => Number(process.hrtime.bigint() / 1_000_000n),
    every: (periodMs, callback) => {
      const timer = setInterval(callback, Math.min(periodMs, MOST_TIMER_MS));
      return () => clearInterval(timer);
    },
    after: (delayMs, callback) => {
      const timer = setTimeout(callback, Math.min(delayMs, MOST_TIMER_MS));
      return () => clearTimeout(timer);
    },
  };
}
