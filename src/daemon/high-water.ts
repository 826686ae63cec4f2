/** The latest time that any record shows, against which a clock that was set back is noticed. */
import { DAY_MS } from '../time.ts';

/** A clock that stays behind for this long of its own time is believed after all: it was the record that was ahead. */
const BELIEVED_AFTER_MS = DAY_MS;

export class HighWater {
  #latestMs: number | null = null;
  #behindSinceMs: number | null = null;

  /** A record was made, or found in the store. */
  seen(atMs: number): void {
    this.#latestMs = Math.max(this.#latestMs ?? atMs, atMs);
  }

  /** The mark as it stands for a clock that shows `nowMs`; null before the first record. */
  at(nowMs: number): number | null {
    if (this.#latestMs === null || nowMs >= this.#latestMs) {
      this.#behindSinceMs = null;
      return this.#latestMs;
    }
    this.#behindSinceMs = Math.min(this.#behindSinceMs ?? nowMs, nowMs);
    if (nowMs - this.#behindSinceMs > BELIEVED_AFTER_MS) this.#latestMs = nowMs;
    return this.#latestMs;
  }
}
