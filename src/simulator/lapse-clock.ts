/** A clock that runs faster than real time, for the demo and for lapses of the daemon. */
import type { Clock } from '../time.ts';

export interface LapseClockOptions {
  /** What the clock shows at the start. */
  readonly epochMs: number;
  /** How many times faster than real time it runs. */
  readonly factor: number;
  readonly realNowMs: () => number;
  /** Calls back once after a real delay unless the returned function is called first; Node's timers when left out. */
  readonly setTimer?: (callback: () => void, delayMs: number) => () => void;
}

/** Node's timers take no longer delays: 2^31 − 1 ms. A longer wait is slept in parts. */
const LONGEST_DELAY_MS = 2_147_483_647;

/**
 * Beats of `every` stand at whole periods from its start. A beat that comes late is given once, beats missed meanwhile
 * are skipped, and the next one stands where it always stood: it neither floods nor drifts.
 */
export function createLapseClock(options: LapseClockOptions): Clock {
  const { epochMs, factor, realNowMs } = options;
  if (!(factor > 0)) throw new RangeError(`Expected a lapse factor above 0, found ${factor}.`);
  const setTimer = options.setTimer ?? nodeTimer;
  const startedMs = realNowMs();
  // whole milliseconds, as every clock in the house shows them
  const nowMs = (): number => Math.floor(epochMs + (realNowMs() - startedMs) * factor);

  /** Calls back when the clock has reached `atMs`, never before. */
  const when = (atMs: number, callback: () => void): (() => void) => {
    let cancel: (() => void) | null = null;
    const sleep = (): void => {
      const leftMs = Math.ceil((atMs - nowMs()) / factor);
      const wake = (): void => (nowMs() >= atMs ? callback() : sleep());
      cancel = setTimer(wake, Math.min(Math.max(0, leftMs), LONGEST_DELAY_MS));
    };
    sleep();
    return () => cancel?.();
  };

  return {
    nowMs,
    after: (delayMs, callback) => when(nowMs() + Math.max(0, delayMs), callback),
    every: (periodMs, callback) => {
      if (!(periodMs > 0)) throw new RangeError(`Expected a period above 0 ms, found ${periodMs}.`);
      const beganMs = nowMs();
      let cancel: (() => void) | null = null;
      const arm = (): void => {
        const beats = Math.floor((nowMs() - beganMs) / periodMs) + 1;
        cancel = when(beganMs + beats * periodMs, () => {
          // Armed first: a callback that throws must not silence the clock, one that stops it must be obeyed.
          arm();
          callback();
        });
      };
      arm();
      return () => cancel?.();
    },
  };
}

function nodeTimer(callback: () => void, delayMs: number): () => void {
  const timer = setTimeout(callback, delayMs);
  return () => clearTimeout(timer);
}
